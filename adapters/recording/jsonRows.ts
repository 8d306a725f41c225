import { readJsonNumber } from '../decoding/number.js';
import type { ChannelNames } from './columns.js';
import { LineCarry, LONGEST_LINE } from './lineCarry.js';
import type { RowReader, Rows } from './reader.js';
import type { SpacedTimes } from './spacedTimes.js';
import { TimeColumn } from './timeColumn.js';

const LF = 0x0a;

/**
 * Rows of a JSON Lines recording: {"time", "flow", "inlet" ...} or, one reading a line, {"time", "channel", "value"}.
 * null is a missing reading, and so is a key that a row lacks.
 */
export class JsonRows implements RowReader {
  private readonly carry: LineCarry;
  private readonly number = new Float64Array(1);
  private readonly times = new TimeColumn();
  timed: boolean | null = null;

  constructor(
    private readonly channels: ChannelNames,
    private readonly rows: Rows,
    private readonly spaced: SpacedTimes,
    private readonly file: string,
  ) {
    this.carry = new LineCarry(LONGEST_LINE, {
      block: (bytes, start, end) => {
        for (let at = start; at < end; ) {
          const stop = bytes.indexOf(LF, at);
          if (stop > at) this.line(bytes.toString('utf8', at, stop));
          at = stop + 1;
        }
      },
      tooLong: (bytes) => rows.fault('too-long', bytes.toString('utf8', 0, 60)),
    });
  }

  push(bytes: Buffer): void {
    this.carry.push(bytes);
  }

  end(torn: boolean): void {
    this.carry.end(torn);
    if (this.channels.saw) this.channels.require(this.file, 'row');
  }

  private line(text: string): void {
    if (text.trim() === '') return;
    const row = object(text);
    if (row === null) {
      this.rows.fault('bad-json', text.slice(0, 60));
      return;
    }
    const time = Object.hasOwn(row, 'time') ? this.time(row['time']) : null;
    this.timed ??= time !== null;
    if (time !== null && Number.isNaN(time)) {
      this.rows.fault('bad-time', text.slice(0, 60));
      return;
    }
    if (Object.hasOwn(row, 'channel') && Object.hasOwn(row, 'value')) {
      if (typeof row['channel'] === 'string') this.cell(row['channel'], time, row['value']);
      else this.rows.fault('missing-field', text.slice(0, 60));
      return;
    }
    const cells = Object.entries(row).filter(([name]) => name !== 'time');
    if (!this.channels.saw) this.channels.note(cells.map(([name]) => name));
    for (const [name, value] of cells) this.cell(name, time, value);
  }

  private time(value: unknown): number {
    if (typeof value === 'number') return this.times.epoch(value);
    if (typeof value !== 'string') return NaN;
    const bytes = Buffer.from(value.slice(0, 64));
    return this.times.read(bytes, 0, bytes.length);
  }

  private cell(name: string, time: number | null, value: unknown): void {
    for (const slot of this.channels.of(name)) {
      const at = time ?? this.spaced.take(slot);
      if (value === null) continue;
      if (readJsonNumber(value, this.number)) this.rows.reading(slot, at, this.number[0]!);
      else this.rows.fault('not-a-number', JSON.stringify(value).slice(0, 60));
    }
  }
}

/** The object in a line of JSON; null where it holds none. */
function object(text: string): Record<string, unknown> | null {
  try {
    const row: unknown = JSON.parse(text);
    return typeof row === 'object' && row !== null && !Array.isArray(row) ? (row as Record<string, unknown>) : null;
  } catch {
    return null;
  }
}
