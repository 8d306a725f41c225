import { clean } from '../../src/text/clean.js';
import { UserError } from '../../src/text/errors.js';
import type { Fault, Wanted } from '../source.js';
import { ChannelNames } from './columns.js';
import { CsvRows } from './csvRows.js';
import { JsonRows } from './jsonRows.js';
import { LONGEST_LINE } from './lineCarry.js';
import { SpacedTimes } from './spacedTimes.js';

/** Where the rows of a recording go. */
export interface Rows {
  reading(slot: number, time: number, value: number): void;
  fault(fault: Fault, sample: string): void;
}

/** Takes a recording's bytes, chunk by chunk, and gives its readings in the order of the file. */
export interface RowReader {
  push(bytes: Buffer): void;
  /**
   * There are no more bytes. A last line without an end counts, save where the file is torn: that line may lack its end.
   * @throws UserError where the whole recording held no channel
   */
  end(torn: boolean): void;
  /** Whether the recording says when its readings were taken; null: not known yet. */
  readonly timed: boolean | null;
}

/**
 * CSV with a header (RFC 4180; comma, semicolon or tab) or JSON Lines, told apart by the first character that is no
 * blank. Long forms (time, channel, value) are known in both.
 * @throws UserError from `push` where the header holds no channel
 */
export class RecordingReader implements RowReader {
  private rows: RowReader | null = null;
  private head: Buffer | null = null; // what came before it could be told what it is
  private readonly channels: ChannelNames;

  constructor(
    private readonly wanted: readonly Wanted[],
    private readonly sink: Rows,
    private readonly file: string,
  ) {
    this.channels = new ChannelNames(wanted);
  }

  push(bytes: Buffer): void {
    if (this.rows) {
      this.rows.push(bytes);
      return;
    }
    const head = this.head ? Buffer.concat([this.head, bytes]) : bytes;
    const from = head[0] === 0xef && head[1] === 0xbb && head[2] === 0xbf ? 3 : 0; // byte order mark
    let first = from;
    let line = from; // begin of the line that holds the first character
    for (; first < head.length && head[first]! <= 0x20; first++) if (head[first] === 0x0a || head[first] === 0x0d) line = first + 1;
    if (head.length < 3 || first === head.length) {
      const blanks = first === head.length && first > 3;
      this.head = blanks && first - line > LONGEST_LINE ? null : Buffer.from(blanks ? head.subarray(line) : head);
      return;
    }
    this.head = null;
    const Kind = head[first] === 0x7b ? JsonRows : CsvRows;
    this.rows = new Kind(this.channels, this.sink, new SpacedTimes(this.wanted), this.file);
    this.rows.push(line === 0 ? head : head.subarray(line)); // a tab before the first name is an unnamed first column
  }

  end(torn = false): void {
    if (this.rows === null && this.head) this.push(Buffer.from('\n\n\n')); // a file of one or two bytes
    if (this.rows === null) throw new UserError(`The recording ${clean(this.file, 200)} is empty.`);
    this.rows.end(torn);
  }

  get timed(): boolean | null {
    return this.rows && this.rows.timed;
  }

  /** Slots of channels of which the recording has shown nothing so far. */
  get absent(): number[] {
    return this.channels.absent;
  }
}
