import type { Fault, Wanted } from '../source.js';
import { CsvRows } from './csvRows.js';
import { JsonRows } from './jsonRows.js';

/** Where the rows of a recording go. */
export interface Rows {
  reading(slot: number, time: number, value: number): void;
  fault(fault: Fault, sample: string): void;
}

/** Takes a recording's bytes, chunk by chunk, and gives its readings in the order of the file. */
export interface RowReader {
  push(bytes: Buffer): void;
  /** The file has ended: a last line without an end counts. */
  end(): void;
}

/**
 * CSV with a header (RFC 4180; comma, semicolon or tab) or JSON Lines, told apart by the first character that is no
 * blank. Long forms (time, channel, value) are known in both.
 * @throws UserError from `push` where the header holds no channel
 */
export class RecordingReader implements RowReader {
  private rows: RowReader | null = null;
  private readonly times: SpacedTimes;

  constructor(
    private readonly wanted: readonly Wanted[],
    private readonly sink: Rows,
    private readonly file: string,
  ) {
    this.times = new SpacedTimes(wanted);
  }

  push(bytes: Buffer): void {
    let from = 0;
    if (this.rows === null) {
      if (bytes[0] === 0xef && bytes[1] === 0xbb && bytes[2] === 0xbf) from = 3;
      while (from < bytes.length && bytes[from]! <= 0x20) from++;
      if (from === bytes.length) return;
      const Kind = bytes[from] === 0x7b ? JsonRows : CsvRows;
      this.rows = new Kind(this.wanted, this.sink, this.times, this.file);
    }
    this.rows.push(from === 0 ? bytes : bytes.subarray(from));
  }

  end(): void {
    this.rows?.end();
  }
}

/** Times for a recording that has none: each channel's readings lie `every` apart, from the epoch on; 1 s where that is not known. */
export class SpacedTimes {
  private readonly next = new Map<number, number>();
  private readonly every: ReadonlyMap<number, number>;

  constructor(wanted: readonly Wanted[]) {
    this.every = new Map(wanted.map(({ slot, every }) => [slot, every ?? 1000]));
  }

  take(slot: number): number {
    const count = this.next.get(slot) ?? 0;
    this.next.set(slot, count + 1);
    return count * (this.every.get(slot) ?? 1000); // no sum that gathers rounding
  }
}
