import { clean } from '../../src/text/clean.js';
import { UserError } from '../../src/text/errors.js';
import { isBlank, readNumber } from '../decoding/number.js';
import { findColumns, type ChannelNames, type Columns } from './columns.js';
import { LineCarry, LONGEST_LINE } from './lineCarry.js';
import { splitQuoted } from './quotes.js';
import type { RowReader, Rows } from './reader.js';
import type { SpacedTimes } from './spacedTimes.js';
import { TimeColumn } from './timeColumn.js';

const LF = 0x0a;
const CR = 0x0d;
const QUOTE = 0x22;

/** A row in quotes may go on over this many lines or characters; beyond, its quote is taken for a stray one. */
const MOST_LINES = 64;
const MOST_HELD = 1 << 16;

/**
 * Rows of a CSV recording. An empty cell is a missing reading; a cell that is no number is counted; a row with fewer
 * columns than the header gives what it has and is counted. Without a time column each row takes its place in time,
 * whatever its cells hold.
 */
export class CsvRows implements RowReader {
  private readonly carry: LineCarry;
  private columns: Columns | null = null;
  private delimiter = 0x2c;
  private readonly number = new Float64Array(1);
  private readonly times = new TimeColumn();
  /** Bounds of the cells of the row at hand, as far as they are of use. */
  private starts = new Int32Array(0);
  private ends = new Int32Array(0);
  /** Lines of a row whose quotes are still open. */
  private held: string[] = [];
  private heldLength = 0;

  constructor(
    private readonly channels: ChannelNames,
    private readonly rows: Rows,
    private readonly spaced: SpacedTimes,
    private readonly file: string,
  ) {
    this.carry = new LineCarry(LONGEST_LINE, {
      block: (bytes, start, end) => this.block(bytes, start, end),
      tooLong: (bytes) => rows.fault('too-long', bytes.toString('utf8', 0, 60)),
    });
  }

  get timed(): boolean | null {
    return this.columns && this.columns.time >= 0;
  }

  push(bytes: Buffer): void {
    this.carry.push(bytes);
  }

  end(torn: boolean): void {
    this.carry.end(torn);
    while (this.held.length > 0) this.letGo();
    if (this.columns === null) throw new UserError(`The recording ${clean(this.file, 200)} has no header line.`, 'Its first line must name the columns.');
    if (this.columns.long && this.channels.saw) this.channels.require(this.file, 'row');
  }

  private block(bytes: Buffer, start: number, end: number): void {
    let at = start;
    while (at < end) {
      if (this.columns !== null && this.held.length === 0) at = this.row(bytes, at);
      else {
        const stop = bytes.indexOf(LF, at);
        const line = bytes.toString('utf8', at, bytes[stop - 1] === CR && stop > at ? stop - 1 : stop);
        if (this.columns === null) this.header(line);
        else this.quoted(line);
        at = stop + 1;
      }
    }
  }

  /** Splits one row into cells while it looks for its end. @returns the place after the row */
  private row(bytes: Buffer, start: number): number {
    const { starts, ends, delimiter } = this;
    const { last } = this.columns!;
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
      else if (byte === QUOTE && at === from) {
        const stop = bytes.indexOf(LF, at);
        this.quoted(bytes.toString('utf8', start, bytes[stop - 1] === CR ? stop - 1 : stop));
        return stop + 1;
      }
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

  /** One more line of a row with quotes. Once they are closed, its cells are laid out as a row without. */
  private quoted(line: string): void {
    this.held.push(line);
    this.heldLength += line.length;
    const mark = String.fromCharCode(this.delimiter);
    const cells = splitQuoted(this.held.join('\n'), mark);
    if (cells) {
      this.held = [];
      this.heldLength = 0;
      const plain = cells.map((cell) => cell.replace(/["\n\r]/g, ' ').replaceAll(mark, ' '));
      this.row(Buffer.from(plain.join(mark) + '\n'), 0);
    } else if (this.held.length >= MOST_LINES || this.heldLength >= MOST_HELD) this.letGo();
  }

  /** The quote that opened the held row was a stray one: its line is counted, and those after it are read for themselves. */
  private letGo(): void {
    const [first, ...others] = this.held;
    this.held = [];
    this.heldLength = 0;
    this.rows.fault('missing-field', first!.slice(0, 60));
    for (const line of others) {
      if (this.held.length > 0) this.quoted(line);
      else this.row(Buffer.from(line + '\n'), 0);
    }
  }

  private take(bytes: Buffer, cells: number, rowStart: number, rowEnd: number): void {
    const { starts, ends, rows } = this;
    const { width, time: timeAt, long, places, slots, last } = this.columns!;
    let time = NaN;
    if (timeAt >= 0) {
      time = timeAt < cells ? this.times.read(bytes, starts[timeAt]!, ends[timeAt]!) : NaN;
      if (time !== time) {
        rows.fault('bad-time', sample(bytes, rowStart, rowEnd));
        return;
      }
    }
    if (cells < width) rows.fault('missing-field', sample(bytes, rowStart, rowEnd));
    if (long) {
      if (cells <= last) return;
      const name = bytes.toString('utf8', starts[long.channel], ends[long.channel]).trim();
      for (const slot of this.channels.of(name)) this.cell(bytes, starts[long.value]!, ends[long.value]!, slot, time);
      return;
    }
    for (let i = 0; i < places.length; i++) {
      const place = places[i]!;
      const slot = slots[i]!;
      const at = timeAt < 0 ? this.spaced.take(slot) : time;
      if (place < cells) this.cell(bytes, starts[place]!, ends[place]!, slot, at);
    }
  }

  private cell(bytes: Buffer, from: number, to: number, slot: number, time: number): void {
    if (from === to) return;
    if (readNumber(bytes, from, to, this.number)) this.rows.reading(slot, time, this.number[0]!);
    else if (!empty(bytes, from, to)) this.rows.fault('not-a-number', sample(bytes, from, to));
  }

  private header(line: string): void {
    const delimiter = [',', ';', '\t'].reduce((best, mark) => (count(line, mark) > count(line, best) ? mark : best));
    this.delimiter = delimiter.charCodeAt(0);
    this.columns = findColumns(splitQuoted(line, delimiter) ?? line.split(delimiter), this.channels, this.file);
    this.starts = new Int32Array(this.columns.last + 1);
    this.ends = new Int32Array(this.columns.last + 1);
  }
}

const sample = (bytes: Buffer, from: number, to: number): string => bytes.toString('utf8', from, Math.min(to, from + 60));
const count = (text: string, mark: string): number => text.split(mark).length - 1;

function empty(bytes: Buffer, from: number, to: number): boolean {
  for (let at = from; at < to; at++) if (!isBlank(bytes[at]!)) return false;
  return true;
}
