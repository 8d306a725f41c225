import { readNumber } from '../decoding/number.js';
import type { Wanted } from '../source.js';
import { findColumns, namesOf, type Columns } from './columns.js';
import { LineCarry, LONGEST_LINE } from './lineCarry.js';
import type { RowReader, Rows, SpacedTimes } from './reader.js';
import { TimeColumn } from './timeColumn.js';

const LF = 0x0a;
const CR = 0x0d;
const QUOTE = 0x22;

/**
 * Rows of a CSV recording. An empty cell is a missing reading; a cell that is no number is counted; a row with fewer
 * columns than the header gives what it has and is counted.
 */
export class CsvRows implements RowReader {
  private readonly carry: LineCarry;
  private columns: Columns | null = null;
  private delimiter = 0x2c;
  private last = 0; // the last column that is of use
  private readonly number = new Float64Array(1);
  private readonly times = new TimeColumn();
  /** Bounds of the cells of the row at hand, as far as they are of use. */
  private starts = new Int32Array(0);
  private ends = new Int32Array(0);
  private readonly slotByName = new Map<string, number>();

  constructor(
    private readonly wanted: readonly Wanted[],
    private readonly rows: Rows,
    private readonly spaced: SpacedTimes,
    private readonly file: string,
  ) {
    for (const channel of [...wanted].reverse()) for (const name of namesOf(channel).reverse()) this.slotByName.set(name, channel.slot);
    this.carry = new LineCarry(LONGEST_LINE, {
      block: (bytes, start, end) => this.block(bytes, start, end),
      tooLong: (bytes) => rows.fault('too-long', bytes.toString('utf8', 0, 60)),
    });
  }

  push(bytes: Buffer): void {
    this.carry.push(bytes);
  }

  end(): void {
    this.carry.end();
  }

  private block(bytes: Buffer, start: number, end: number): void {
    let at = start;
    while (at < end) {
      if (this.columns === null) {
        const stop = bytes.indexOf(LF, at);
        this.header(bytes, at, bytes[stop - 1] === CR ? stop - 1 : stop);
        at = stop + 1;
      } else at = this.row(bytes, at);
    }
  }

  /** Splits one row into cells while it looks for its end. @returns the place after the row */
  private row(bytes: Buffer, start: number): number {
    const { starts, ends, last, delimiter } = this;
    let cell = 0;
    let from = start;
    let at = start;
    for (;;) {
      const byte = bytes[at]!;
      if (byte > 0x2c && byte !== delimiter) {
        at++; // digits, signs but plus, points: most bytes of a recording
        continue;
      }
      if (byte === delimiter) {
        if (cell <= last) {
          starts[cell] = from;
          ends[cell] = at;
        }
        cell++;
        from = at + 1;
      } else if (byte === LF) break;
      else if (byte === QUOTE) return this.quotedRow(bytes, start);
      at++;
    }
    const stop = at > from && bytes[at - 1] === CR ? at - 1 : at;
    if (cell <= last) {
      starts[cell] = from;
      ends[cell] = stop;
    }
    if (cell > 0 || stop > from) this.take(bytes, cell + 1, start, stop);
    return at + 1;
  }

  /** A row with quotes (RFC 4180) is unquoted into a row of its own; a line break within quotes is not taken. */
  private quotedRow(bytes: Buffer, start: number): number {
    const stop = bytes.indexOf(LF, start);
    const cells = splitQuoted(bytes.toString('utf8', start, bytes[stop - 1] === CR ? stop - 1 : stop), String.fromCharCode(this.delimiter));
    const plain = Buffer.from(cells.map((cell) => cell.replace(/["\n\r]/g, ' ').replaceAll(String.fromCharCode(this.delimiter), ' ')).join(String.fromCharCode(this.delimiter)) + '\n');
    this.row(plain, 0);
    return stop + 1;
  }

  private take(bytes: Buffer, cells: number, rowStart: number, rowEnd: number): void {
    const { starts, ends, columns, number, rows } = this;
    const { slots, time: timeAt, long } = columns!;
    const have = Math.min(cells, this.last + 1);
    let time = NaN;
    if (timeAt >= 0) {
      time = timeAt < have ? this.times.read(bytes, starts[timeAt]!, ends[timeAt]!) : NaN;
      if (time !== time) {
        rows.fault('bad-time', bytes.toString('utf8', rowStart, Math.min(rowEnd, rowStart + 60)));
        return;
      }
    }
    if (cells < slots.length) rows.fault('missing-field', bytes.toString('utf8', rowStart, Math.min(rowEnd, rowStart + 60)));
    if (long) {
      if (have < 3) return;
      const slot = this.slotByName.get(bytes.toString('utf8', starts[long.channel], ends[long.channel]).trim());
      if (slot !== undefined) this.cell(bytes, starts[long.value]!, ends[long.value]!, slot, time);
      return;
    }
    for (let column = 0; column < have; column++) {
      const slot = slots[column]!;
      if (slot < 0) continue;
      const from = starts[column]!;
      const to = ends[column]!;
      if (from === to) {
        if (timeAt < 0) this.spaced.take(slot); // a missing reading takes its place in time
        continue;
      }
      if (readNumber(bytes, from, to, number)) rows.reading(slot, timeAt < 0 ? this.spaced.take(slot) : time, number[0]!);
      else rows.fault('not-a-number', bytes.toString('utf8', from, Math.min(to, from + 60)));
    }
  }

  private cell(bytes: Buffer, from: number, to: number, slot: number, time: number): void {
    if (from === to) return;
    if (readNumber(bytes, from, to, this.number)) this.rows.reading(slot, time, this.number[0]!);
    else this.rows.fault('not-a-number', bytes.toString('utf8', from, Math.min(to, from + 60)));
  }

  private header(bytes: Buffer, start: number, end: number): void {
    const text = bytes.toString('utf8', start, end);
    const delimiter = [',', ';', '\t'].reduce((best, mark) => (count(text, mark) > count(text, best) ? mark : best));
    this.delimiter = delimiter.charCodeAt(0);
    this.columns = findColumns(splitQuoted(text, delimiter), this.wanted, this.file);
    const { slots, time, long } = this.columns;
    this.last = Math.max(time, long?.channel ?? 0, long?.value ?? 0, slots.findLastIndex((slot) => slot >= 0));
    this.starts = new Int32Array(this.last + 1);
    this.ends = new Int32Array(this.last + 1);
  }
}

const count = (text: string, mark: string): number => text.split(mark).length - 1;

/** The cells of one line of CSV, quotes taken off and doubled quotes made one. */
export function splitQuoted(line: string, delimiter: string): string[] {
  const cells: string[] = [];
  let cell = '';
  let quoted = false;
  for (let i = 0; i < line.length; i++) {
    const mark = line[i]!;
    if (quoted) {
      if (mark !== '"') cell += mark;
      else if (line[i + 1] === '"') {
        cell += '"';
        i++;
      } else quoted = false;
    } else if (mark === '"') quoted = true;
    else if (mark === delimiter) {
      cells.push(cell);
      cell = '';
    } else cell += mark;
  }
  cells.push(cell);
  return cells;
}
