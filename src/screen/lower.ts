import { formatDuration, formatOdds, formatValue, formatZ } from '../engine/format.js';
import type { ChannelView, StandView } from './model.js';
import type { Raster } from './raster.js';
import type { Theme } from './theme.js';

/** Alarms in words, standing ones first, each with its age; then those that lately cleared. */
export function drawAlarms(r: Raster, t: Theme, view: StandView, row: number, height: number): void {
  const standing = view.alarms.filter(({ clearedAt }) => clearedAt === null);
  if (view.alarms.length === 0) {
    r.text(1, row, 'No alarm has been raised.', t.faint);
    return;
  }
  const lines = [...standing, ...view.alarms.filter(({ clearedAt }) => clearedAt !== null)];
  let at = row;
  for (const [i, alarm] of lines.entries()) {
    const left = row + height - at;
    if (left <= 0) return;
    if (left === 1 && lines.length - i > 1 && standing.length - i > 1) {
      r.text(3, at, `and ${standing.length - i} more alarms stand`, t.alarm);
      return;
    }
    const over = alarm.clearedAt !== null;
    const age = formatDuration(Math.max(0, view.now - (alarm.clearedAt ?? alarm.since)));
    const attrs = over ? t.faint : t.alarm;
    r.put(1, at, over ? '·' : '■', attrs);
    r.text(3, at, over ? `over ${age}` : age, attrs, 14);
    at += wrapped(r, alarm.sentence, 18, at, r.width - 19, over ? t.faint : t.plain, over ? 1 : Math.min(left, 2));
  }
}

/** Text over at most so many rows, broken at blanks. @returns the rows taken */
function wrapped(r: Raster, text: string, column: number, row: number, width: number, attrs: number, most: number): number {
  let rest = text;
  for (let i = 0; i < most; i++) {
    if (rest.length <= width || i === most - 1) {
      r.text(column, row + i, rest.length <= width ? rest : `${rest.slice(0, width - 1)}…`, attrs);
      return i + 1;
    }
    const cut = rest.lastIndexOf(' ', width);
    const end = cut > width / 2 ? cut : width;
    r.text(column, row + i, rest.slice(0, end), attrs);
    rest = rest.slice(end).trimStart();
  }
  return most;
}

/** The chosen channel in figures: its band and how well it is known, and the rolling window. */
export function drawFigures(r: Raster, t: Theme, c: ChannelView, row: number, height: number): void {
  const { band, window: w, unit } = c;
  const u = unit && ` ${unit}`;
  const value = (x: number): string => formatValue(x, band?.sigma ?? null, c.resolution);
  const fine = (x: number): string => formatValue(x, (band?.sigma ?? Math.abs(x)) / 5);
  const pairs: [string, string][] = [];
  if (band) {
    pairs.push(
      ['band', `${band.origin}${band.n === null ? '' : `, n ${band.n}`}`],
      ['centre', `${fine(band.centre)}${band.centreUncertainty === null ? '' : ` ± ${fine(band.centreUncertainty)}`}${u}`],
      ['sigma', `${fine(band.sigma)}${band.sigmaUncertainty === null ? '' : ` ± ${fine(band.sigmaUncertainty)}`}${u}`],
      ['limits', `${value(band.low)} to ${value(band.high)}${u}, ${band.k} sigma`],
    );
  } else pairs.push(['band', 'not yet: settling']);
  pairs.push(['newest', c.z === null || c.odds === null ? '-' : `${formatZ(c.z)} sigma, ${formatOdds(c.odds)}`]);
  if (w)
    pairs.push(
      ['window', `${w.n} readings`],
      ['mean', `${fine(w.mean)}${u}`],
      ['sd', `${fine(w.sd)}${u}`],
      ['median', `${fine(w.median)}${u}`],
      ['MAD', `${fine(w.mad)}${u}`],
      ['min, max', `${value(w.min)}, ${value(w.max)}${u}`],
      ['lag-1', c.lag1 === null || Number.isNaN(c.lag1) ? '-' : c.lag1.toFixed(3)],
    );
  const columns = Math.max(1, Math.ceil(pairs.length / height));
  const width = Math.max(20, Math.floor((r.width - 2) / columns));
  for (const [i, [name, text]] of pairs.entries()) {
    const column = 1 + Math.floor(i / height) * width;
    if (column >= r.width) return;
    r.text(column, row + (i % height), name.padEnd(9), t.faint);
    r.text(column + 9, row + (i % height), text, t.plain, width - 10);
  }
}
