import { formatValue } from '../engine/format.js';
import { pdf } from '../stats/normal.js';
import { valueAxis, type Axis } from './axis.js';
import type { ChannelView } from './model.js';
import type { Raster } from './raster.js';
import type { Theme } from './theme.js';

const GUTTER = 10; // columns for the labels of the value axis

/** Weights: what wins where things meet in a cell. */
const ZONE = 1;
const CENTRE = 2;
const BAR = 3;
const LIMIT = 4;
const CURVE = 5;
const DATA = 6;

/**
 * One picture of a channel: the trend, and at its right end, on the same value axis, the histogram of the readings shown
 * turned on its side with the normal curve of the band; centre line, zones and limits run through both.
 * @param span readings shown
 */
export function drawPicture(r: Raster, t: Theme, c: ChannelView, row: number, height: number, span: number): void {
  const top = row * 4;
  const axis = valueAxis(c, span, height * 4);
  if (!axis) {
    r.text(GUTTER, row + (height >> 1), c.state === 'waiting' ? 'Nothing has come yet.' : 'No reading that could be drawn.', t.faint);
    return;
  }
  const aside = Math.max(12, Math.min(30, Math.floor((r.width - GUTTER) / 5)));
  const left = GUTTER * 2;
  const right = r.width * 2 - 1;
  const split = (r.width - aside) * 2;
  drawLines(r, t, c, axis, top, left, right);
  drawTrend(r, t, c, axis, top, left, split - 3, span, height);
  drawHistogram(r, t, c, axis, top, split, right, span, height);
  drawLabels(r, t, c, axis, row, height);
}

function drawLines(r: Raster, t: Theme, { band, tolerance }: ChannelView, axis: Axis, top: number, left: number, right: number): void {
  const level = (value: number, weight: number, on: number, off: number, attrs = t.faint): void => {
    if (value >= axis.low && value <= axis.high) r.level(left, right, top + axis.y(value), attrs, weight, on, off);
  };
  for (const line of tolerance ?? []) level(line, LIMIT, 1, 2);
  if (!band) return;
  const { centre, sigma, k } = band;
  level(centre, CENTRE, 3, 2);
  for (const zone of [k / 3, (2 * k) / 3]) for (const side of [-1, 1]) level(centre + side * zone * sigma, ZONE, 1, 7);
  level(band.low, LIMIT, 4, 1, t.plain);
  level(band.high, LIMIT, 4, 1, t.plain);
}

/** Least and greatest reading of each dot column, joined: as true as drawing every reading, at a cost bounded by the width. */
function drawTrend(r: Raster, t: Theme, c: ChannelView, axis: Axis, top: number, left: number, right: number, span: number, height: number): void {
  const { trend, trendLength, band } = c;
  const shown = Math.min(span, trendLength);
  const from = trendLength - shown;
  const width = right - left;
  const bottom = height * 4 - 1;
  let [column, low, high, last, before] = [-1, 0, 0, 0, NaN];
  const inside = (y: number): number => Math.max(0, Math.min(bottom, y));
  const flush = (): void => {
    if (column < 0) return;
    const [a, b] = [inside(axis.y(high)), inside(axis.y(low))];
    r.upright(column, top + a, top + b, t.plain, DATA);
    if (!Number.isNaN(before)) r.upright(column, top + inside(axis.y(before)), top + (axis.y(before) < a ? a : axis.y(before) > b ? b : inside(axis.y(before))), t.plain, DATA);
    before = last;
  };
  for (let i = 0; i < shown; i++) {
    const value = trend[from + i]!;
    const at = right - Math.round(((shown - 1 - i) * width) / Math.max(1, span - 1));
    if (at !== column) {
      flush();
      [column, low, high] = [at, value, value];
    } else if (value < low) low = value;
    else if (value > high) high = value;
    last = value;
  }
  flush();
  if (!band) return;
  for (let i = 0; i < shown; i++) {
    const value = trend[from + i]!;
    if (value <= band.high && value >= band.low) continue;
    const at = right - Math.round(((shown - 1 - i) * width) / Math.max(1, span - 1));
    const y = axis.y(value);
    r.put(at >> 1, (top + inside(y)) >> 2, y < 0 ? '▴' : y > bottom ? '▾' : '●', t.alarm, DATA + 1);
  }
}

/** Readings counted by row of the picture, and the curve that the band promises for as many. */
function drawHistogram(r: Raster, t: Theme, c: ChannelView, axis: Axis, top: number, left: number, right: number, span: number, height: number): void {
  const { trend, trendLength, band } = c;
  const rows = height * 4;
  const shown = Math.min(span, trendLength);
  if (shown === 0) return;
  const perRow = (axis.high - axis.low) / (rows - 1);
  // A bin narrower than a quarter sigma shows noise, not shape: rows are gathered into bins.
  const gather = band ? Math.max(2, Math.round((band.sigma * 0.3) / perRow)) : 4;
  const counts = new Float64Array(Math.ceil(rows / gather));
  for (let i = trendLength - shown; i < trendLength; i++) {
    const y = axis.y(trend[i]!);
    if (y >= 0 && y < rows) counts[Math.floor(y / gather)]!++;
  }
  const expected = (y: number): number => {
    if (!band) return 0;
    const value = axis.high - y * perRow;
    return (shown * gather * perRow * pdf((value - band.centre) / band.sigma)) / band.sigma;
  };
  const peak = Math.max(...counts, band ? (shown * gather * perRow * pdf(0)) / band.sigma : 0);
  const reach = (count: number): number => Math.round((count / peak) * (right - left - 2));
  for (let y = 0; y < rows; y++) {
    const length = reach(counts[Math.floor(y / gather)]!);
    if (length > 0 && (y % gather !== gather - 1 || gather < 3)) r.level(left, left + length, top + y, t.faint, BAR);
    r.dot(left - 1, top + y, t.faint, ZONE);
  }
  if (!band) return;
  let last = reach(expected(0));
  for (let y = 0; y < rows; y++) {
    const next = reach(expected(y));
    for (let x = Math.min(last, next); x <= Math.max(last, next); x++) if (next > 0 || last > 0) r.dot(left + x, top + y, t.plain, CURVE);
    last = next;
  }
}

function drawLabels(r: Raster, t: Theme, c: ChannelView, axis: Axis, row: number, height: number): void {
  const { band, tolerance } = c;
  const step = (axis.high - axis.low) / 200;
  const taken = new Set<number>();
  const label = (value: number, attrs: number, mark = ''): void => {
    const at = Math.max(0, Math.min(height - 1, axis.y(value) >> 2));
    if (value < axis.low || value > axis.high || taken.has(at)) return;
    taken.add(at);
    const text = formatValue(value, band?.sigma ?? step * 20, c.resolution) + mark;
    r.text(0, row + at, text.padStart(GUTTER - 1).slice(-(GUTTER - 1)), attrs, GUTTER - 1);
  };
  if (band) {
    label(band.high, t.plain);
    label(band.low, t.plain);
    label(band.centre, t.plain);
  }
  for (const line of tolerance ?? []) label(line, t.faint, ' tol');
  label(axis.high, t.faint);
  label(axis.low, t.faint);
}
