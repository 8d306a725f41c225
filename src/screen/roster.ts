import { formatValue, formatZ } from '../engine/format.js';
import type { ChannelView, StandView } from './model.js';
import type { Raster } from './raster.js';
import type { Theme } from './theme.js';
import type { Ui } from './ui.js';

const REACH = 5; // sigmas to each side of the ruler
const RULER = 21;
const SPARK = '▁▂▃▄▅▆▇█';

/** Name, state, value and place among its own sigmas of each channel: unlike quantities compare at a glance. */
export function drawRoster(r: Raster, t: Theme, view: StandView, ui: Ui, row: number, height: number, selected: number): void {
  const names = Math.max(8, Math.min(24, ...[Math.max(...view.channels.map(({ channel }) => channel.length), 0)]));
  for (let i = 0; i < height; i++) {
    const channel = view.channels[ui.first + i];
    if (channel) drawRow(r, t, view, channel, row + i, names, ui.first + i === selected);
  }
  if (view.channels.length === 0) r.text(1, row, 'This stand has no channels.', t.faint);
}

function drawRow(r: Raster, t: Theme, view: StandView, c: ChannelView, row: number, names: number, chosen: boolean): void {
  const silent = c.state === 'alarm' && view.alarms.some(({ channel, detector, clearedAt }) => channel === c.channel && detector === 'silent' && clearedAt === null);
  const [mark, word, attrs] = stateOf(t, c, silent);
  r.put(0, row, chosen ? '▸' : ' ', t.strong);
  r.put(1, row, mark, attrs);
  r.text(3, row, word.padEnd(9), attrs, 9);
  r.text(13, row, c.channel, chosen ? t.strong : t.plain, names);
  let at = 14 + names;
  const value = c.value === null ? '-' : formatValue(c.value, c.band?.sigma ?? null, c.resolution);
  r.text(at, row, value.padStart(9), c.stale ? t.faint : t.plain, 12);
  r.text(at + 10, row, c.unit, t.faint, 7);
  at += 18;
  r.text(at, row, (c.z === null ? '' : `${formatZ(c.z)}σ`).padStart(7), c.state === 'alarm' ? t.alarm : t.plain, 8);
  at += 8;
  if (at + RULER <= r.width) drawRuler(r, t, c, at, row);
  at += RULER + 1;
  const room = r.width - at - 1;
  if (room >= 6) drawSpark(r, t, c, at, row, room);
}

function stateOf(t: Theme, c: ChannelView, silent: boolean): readonly [mark: string, word: string, attrs: number] {
  switch (c.state) {
    case 'alarm':
      return ['■', silent ? 'SILENT' : 'ALARM', t.alarm];
    case 'settling':
      return ['·', `settle ${c.settled ? Math.floor((100 * c.settled[0]) / c.settled[1]) : 0}%`, t.faint];
    case 'waiting':
      return ['·', c.stale ? 'old value' : 'waiting', t.faint];
    case 'normal':
      return [' ', 'normal', t.faint];
  }
}

/** A ruler in sigmas, the limits marked on it and the newest reading on top. */
function drawRuler(r: Raster, t: Theme, { band, z, state }: ChannelView, column: number, row: number): void {
  const place = (sigmas: number): number => column + Math.round(((Math.max(-REACH, Math.min(REACH, sigmas)) + REACH) / (2 * REACH)) * (RULER - 1));
  for (let i = 0; i < RULER; i++) r.put(column + i, row, '·', t.faint, 1);
  if (!band) return;
  r.put(place(0), row, '┊', t.faint, 2);
  for (const side of [-1, 1]) if (band.k <= REACH) r.put(place(side * band.k), row, '│', t.faint, 2);
  if (z === null) return;
  r.put(place(z), row, z > REACH ? '▸' : z < -REACH ? '◂' : '●', state === 'alarm' ? t.alarm : t.plain, 3);
}

/** The newest readings, each column their mean, in sigmas from -4 to 4. */
function drawSpark(r: Raster, t: Theme, { band, trend, trendLength }: ChannelView, column: number, row: number, room: number): void {
  if (!band) return;
  const each = 5;
  const columns = Math.min(room, Math.floor(trendLength / each));
  for (let i = 0; i < columns; i++) {
    let sum = 0;
    const from = trendLength - (columns - i) * each;
    for (let j = 0; j < each; j++) sum += trend[from + j]!;
    const z = (sum / each - band.centre) / band.sigma;
    const level = Math.max(0, Math.min(7, Math.floor(z + 4)));
    r.put(column + i, row, SPARK[Number.isNaN(level) ? 0 : level]!, t.faint);
  }
}
