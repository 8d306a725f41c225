import { formatValue, formatZ } from '../engine/format.js';
import type { AlarmView, ChannelView, StandView } from './model.js';
import type { Raster } from './raster.js';
import type { Theme } from './theme.js';
import type { Ui } from './ui.js';

const SPARK = '▁▂▃▄▅▆▇█';
const PER_COLUMN = 2; // readings

/** Columns of a row. */
interface Columns {
  readonly name: number;
  readonly nameWidth: number;
  readonly value: number;
  readonly z: number;
  readonly ruler: number;
  /** Sigmas to each side of the ruler's centre. */
  readonly reach: number;
  /** Characters to a sigma. */
  readonly perSigma: number;
  readonly spark: number;
  readonly sparkWidth: number;
}

const SCALES = [4, 3, 2, 1.5, 1, 0.75, 0.5] as const; // characters to a sigma, with which every second sigma has a whole place or nearly so
const NAME = 14;
const VALUE_AND_UNIT = 15;

/** Sigmas that the rulers reach to: one number for all rows, so that they compare, and enough to hold the limits of a small budget. */
function reachOf({ channels }: StandView): number {
  const k = channels.reduce((widest, { band }) => (band ? Math.max(widest, band.k) : widest), 0);
  return k < 4 ? 4 : k < 6 ? 6 : 8;
}

function columns(width: number, longest: number, reach: number): Columns {
  const nameWidth = Math.max(8, Math.min(28, width - 57, longest)); // whole names before the spark, but not before the ruler
  const value = NAME + nameWidth + 1;
  const z = value + VALUE_AND_UNIT + 1;
  const ruler = z + 7;
  const room = Math.min(width >= 110 ? 36 : 18, width - ruler - 1);
  const perSigma = SCALES.find((scale) => 2 * reach * scale <= room) ?? SCALES.at(-1)!;
  const spark = ruler + 2 * reach * perSigma + 3;
  return { name: NAME, nameWidth, value, z, ruler, reach, perSigma, spark, sparkWidth: Math.min(60, width - spark - 1) };
}

/** State, name, value and place among its own sigmas of each channel: unlike quantities compare at a glance. */
export function drawRoster(r: Raster, t: Theme, view: StandView, ui: Ui, row: number, height: number, selected: number): void {
  if (view.channels.length === 0) {
    r.text(1, row, 'This stand has no channels.', t.faint);
    return;
  }
  const standing = standingByChannel(view);
  const places = columns(r.width, view.channels.reduce((longest, { channel }) => Math.max(longest, channel.length), 0), reachOf(view));
  for (let i = 0; i < height; i++) {
    const channel = view.channels[ui.first + i];
    if (channel) drawRow(r, t, channel, standing.get(channel.channel) ?? null, row + i, places, ui.first + i === selected);
  }
}

/** The newest standing alarm of each channel. */
export function standingByChannel(view: StandView): Map<string, AlarmView> {
  const newest = new Map<string, AlarmView>();
  for (const alarm of view.alarms) if (alarm.clearedAt === null && !newest.has(alarm.channel)) newest.set(alarm.channel, alarm);
  return newest;
}

function drawRow(r: Raster, t: Theme, c: ChannelView, alarm: AlarmView | null, row: number, places: Columns, chosen: boolean): void {
  const [mark, word, attrs] = stateMark(t, c, alarm);
  r.put(0, row, chosen ? '▸' : ' ', t.strong);
  r.put(1, row, mark, attrs);
  r.text(3, row, word, attrs, 10);
  r.text(places.name, row, c.channel, chosen ? t.strong : t.plain, places.nameWidth);
  const value = c.value === null ? '-' : formatValue(c.value, c.band?.sigma ?? null, c.resolution);
  const after = r.text(places.value, row, value.padStart(8), c.stale ? t.note : t.plain, VALUE_AND_UNIT);
  if (c.value !== null) r.text(after + 1, row, c.unit, t.faint, places.z - after - 2);
  if (c.state === 'settling' && c.settled) drawProgress(r, t, c.settled, row, places);
  else if (c.band) {
    if (c.z !== null && Number.isFinite(c.z)) r.text(places.z, row, `${formatZ(c.z)}σ`.padStart(6), alarm ? t.alarm : t.plain, 7);
    drawRuler(r, t, c, alarm !== null, row, places);
    drawSpark(r, t, c, row, places);
  }
}

/** A channel's state as a shape and a word, and the attributes that go with both. */
export function stateMark(t: Theme, c: ChannelView, alarm: AlarmView | null): readonly [mark: string, word: string, attrs: number] {
  switch (c.state) {
    case 'alarm':
      if (alarm?.detector === 'silent') return ['■', 'SILENT', t.alarm];
      if (alarm?.detector === 'frozen') return ['■', 'FROZEN', t.alarm];
      if (alarm?.detector === 'off-scale') return ['■', 'OFF SCALE', t.alarm];
      return ['■', alarm?.side ? `ALARM ${alarm.side}` : 'ALARM', t.alarm];
    case 'settling':
      return ['○', 'settling', t.note];
    case 'waiting':
      return ['○', c.stale ? 'old value' : 'waiting', t.note];
    case 'normal':
      return ['·', 'normal', t.faint];
  }
}

/** How far a band has been learned, in the ruler's place. */
function drawProgress(r: Raster, t: Theme, [taken, needed]: readonly [number, number], row: number, { z, ruler, reach, perSigma }: Columns): void {
  const words = `${taken}/${needed}`;
  r.text(z, row, words.padStart(6), t.note, 11);
  const from = Math.max(ruler, z + words.length + 1);
  const length = ruler + 2 * reach * perSigma - from;
  const done = Math.round(length * Math.max(0, Math.min(1, taken / needed)));
  for (let i = 0; i <= length; i++) r.put(from + i, row, i <= done ? '━' : '·', i <= done ? t.note : t.faint);
}

/** A ruler in sigmas: centre and limits marked, and the newest reading on top. */
function drawRuler(r: Raster, t: Theme, { band, z }: ChannelView, alarmed: boolean, row: number, { ruler, reach, perSigma }: Columns): void {
  const place = (sigmas: number): number => ruler + Math.round((Math.max(-reach, Math.min(reach, sigmas)) + reach) * perSigma);
  for (let sigmas = -reach; sigmas <= reach; sigmas += perSigma < 2 ? 2 : 1) r.put(place(sigmas), row, '·', t.faint, 1);
  r.put(place(0), row, '┊', t.faint, 2);
  if (band && band.k <= reach) for (const side of [-1, 1]) r.put(place(side * band.k), row, '│', t.faint, 2);
  if (z === null || Number.isNaN(z)) return;
  r.put(place(z), row, z > reach ? '▸' : z < -reach ? '◂' : '●', alarmed ? t.alarm : t.plain, 3);
}

/**
 * The newest readings in sigmas, as far as the ruler reaches; a column shows the one of its readings that lies farthest out.
 * Columns are counted from the channel's first reading, so that they move but do not change.
 */
function drawSpark(r: Raster, t: Theme, { band, trend, trendLength, index }: ChannelView, row: number, { spark, sparkWidth, reach }: Columns): void {
  if (!band || sparkWidth < 5) return;
  const oldest = index - trendLength + 1;
  const last = Math.floor(index / PER_COLUMN);
  const first = Math.max(last - sparkWidth + 1, Math.ceil(oldest / PER_COLUMN));
  for (let column = first; column <= last; column++) {
    let farthest = 0;
    for (let i = column * PER_COLUMN; i < (column + 1) * PER_COLUMN && i <= index; i++) {
      const z = (trend[i - oldest]! - band.centre) / band.sigma;
      if (Math.abs(z) > Math.abs(farthest)) farthest = z;
    }
    const half = SPARK.length / 2;
    const level = Math.max(0, Math.min(SPARK.length - 1, Math.floor((farthest * half) / reach + half)));
    r.put(spark + column - first, row, SPARK[level]!, Math.abs(farthest) > band.k ? t.alarm : t.faint);
  }
}
