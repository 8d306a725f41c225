import { readJsonNumber } from '../decoding/number.js';
import { parseTime } from '../decoding/time.js';
import type { Wanted } from '../source.js';
import { findColumns, namesOf } from './columns.js';
import { LineCarry, LONGEST_LINE } from './lineCarry.js';
import type { RowReader, Rows, SpacedTimes } from './reader.js';
import { TimeColumn } from './timeColumn.js';

const LF = 0x0a;

/**
 * Rows of a JSON Lines recording: {"time", "flow", "inlet" ...} or, one reading a line, {"time", "channel", "value"}.
 * null is a missing reading.
 */
export class JsonRows implements RowReader {
  private readonly carry: LineCarry;
  private readonly number = new Float64Array(1);
  private readonly times = new TimeColumn();
  private readonly slotByName = new Map<string, number>();
  private checked = false;

  constructor(
    private readonly wanted: readonly Wanted[],
    private readonly rows: Rows,
    private readonly spaced: SpacedTimes,
    private readonly file: string,
  ) {
    for (const channel of [...wanted].reverse()) for (const name of namesOf(channel).reverse()) this.slotByName.set(name, channel.slot);
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

  end(): void {
    this.carry.end();
  }

  private line(text: string): void {
    if (text.trim() === '') return;
    let row: unknown;
    try {
      row = JSON.parse(text);
    } catch {
      this.rows.fault('bad-json', text.slice(0, 60)); return;
    }
    if (typeof row !== 'object' || row === null || Array.isArray(row)) { this.rows.fault('bad-json', text.slice(0, 60)); return; }
    const fields = row as Record<string, unknown>;
    const long = Object.hasOwn(fields, 'channel') && Object.hasOwn(fields, 'value');
    if (!this.checked) {
      if (!long) findColumns(Object.keys(fields), this.wanted, this.file);
      this.checked = true;
    }
    let time: number | null = null;
    if (Object.hasOwn(fields, 'time')) {
      time = this.time(fields['time']);
      if (time !== time) { this.rows.fault('bad-time', text.slice(0, 60)); return; }
    }
    if (long) {
      const slot = typeof fields['channel'] === 'string' ? this.slotByName.get(fields['channel']) : undefined;
      if (slot !== undefined) this.cell(slot, time, fields['value']);
      return;
    }
    for (const [name, value] of Object.entries(fields)) {
      const slot = name === 'time' ? undefined : this.slotByName.get(name);
      if (slot !== undefined) this.cell(slot, time, value);
    }
  }

  private time(value: unknown): number {
    if (typeof value === 'number') return this.times.epoch(value);
    if (typeof value !== 'string') return NaN;
    const bytes = Buffer.from(value.slice(0, 64));
    const time = this.times.read(bytes, 0, bytes.length);
    return time === time ? time : parseTime(value);
  }

  private cell(slot: number, time: number | null, value: unknown): void {
    const at = time ?? this.spaced.take(slot);
    if (value === null) return;
    if (readJsonNumber(value, this.number)) this.rows.reading(slot, at, this.number[0]!);
    else this.rows.fault('not-a-number', JSON.stringify(value).slice(0, 60));
  }
}
