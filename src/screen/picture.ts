import { pdf } from '../stats/normal.js';
import { valueAxis, type Axis } from './axis.js';
import { axisLabels, drawLabels, GUTTER, gutterOf } from './labels.js';
import type { ChannelView } from './model.js';
import type { Raster } from './raster.js';
import type { Theme } from './theme.js';

/** Columns of the histogram at the right of the picture. */
export const histogramWidth = (width: number): number => Math.max(14, Math.min(40, Math.floor((width - GUTTER) / 5)));

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
 * @returns columns that the labels at its left take, for what is drawn below it
 */
export function drawPicture(r: Raster, t: Theme, c: ChannelView, row: number, height: number, span: number): number {
  const top = row * 4;
  const axis = valueAxis(c, span, height * 4);
  if (!axis) {
    r.text(GUTTER, row + (height >> 1), c.index < 0 && !c.stale ? 'Nothing has come from this channel yet.' : 'No reading that could be drawn.', t.faint);
    return GUTTER;
  }
  const aside = histogramWidth(r.width);
  const labels = axisLabels(t, c, axis);
  const gutter = gutterOf(labels);
  const left = gutter * 2;
  const right = r.width * 2 - 1;
  const split = (r.width - aside) * 2;
  drawLines(r, t, c, axis, top, left, right);
  drawTrend(r, t, c, axis, top, left, split - 3, span, height);
  drawHistogram(r, t, c, axis, top, split, right, span, height);
  drawLabels(r, labels, axis, row, height, gutter - 1);
  return gutter;
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

/**
 * Dot column of a reading: the newest at the right edge, the one `span` before it at the left. Columns are counted from the
 * channel's first reading, so that the same readings always share one: the trend moves by whole columns and keeps its shape.
 * @param newest index of the newest reading in the channel @param age how many readings before it
 */
export function dotColumn(newest: number, age: number, span: number, left: number, right: number): number {
  const perReading = (right - left) / Math.max(1, span - 1);
  return Math.max(left, right - (Math.floor(newest * perReading) - Math.floor((newest - age) * perReading)));
}

/**
 * Least and greatest reading of each dot column, joined from column to column: as true as drawing every reading, at a
 * cost bounded by the width. Where dots are coarse, readings are points. Readings beyond a limit get a mark of their own.
 */
function drawTrend(r: Raster, t: Theme, c: ChannelView, axis: Axis, top: number, left: number, right: number, span: number, height: number): void {
  const { trend, trendLength, band } = c;
  const shown = Math.min(span, trendLength);
  const bottom = height * 4 - 1;
  const inside = (y: number): number => top + Math.max(0, Math.min(bottom, y));
  let [column, low, high, last, before] = [-1, 0, 0, 0, -1];
  const flush = (): void => {
    if (column < 0) return;
    r.upright(column, inside(axis.y(high)), inside(axis.y(low)), t.plain, DATA);
    before = column;
  };
  for (let i = trendLength - shown; i < trendLength; i++) {
    const value = trend[i]!;
    if (Number.isNaN(value)) {
      flush();
      [column, before] = [-1, -1]; // a gap
      continue;
    }
    const at = dotColumn(c.index, trendLength - 1 - i, span, left, right);
    if (!r.fine) r.put(at >> 1, inside(axis.y(value)) >> 2, '•', t.plain, DATA);
    else if (at !== column) {
      flush();
      if (before >= 0) r.line(before, inside(axis.y(last)), at, inside(axis.y(value)), t.plain, DATA);
      [column, low, high] = [at, value, value];
    } else if (value < low) low = value;
    else if (value > high) high = value;
    last = value;
    if (!band || (value <= band.high && value >= band.low)) continue;
    const y = axis.y(value);
    r.put(at >> 1, inside(y) >> 2, y < 0 ? '▴' : y > bottom ? '▾' : '●', t.alarm, DATA + 1);
  }
  if (r.fine) flush();
}

/** Readings counted by row of the picture, and the curve that the band promises for as many. */
function drawHistogram(r: Raster, t: Theme, c: ChannelView, axis: Axis, top: number, left: number, right: number, span: number, height: number): void {
  const { trend, trendLength, band } = c;
  const rows = height * 4;
  const shown = Math.min(span, trendLength);
  for (let y = 0; y < rows; y++) r.dot(left - 2, top + y, t.faint, ZONE);
  if (shown === 0) return;
  const perRow = (axis.high - axis.low) / (rows - 1);
  // A bin narrower than a third of a sigma shows noise, not shape: rows are gathered into bins.
  const wanted = band ? Math.max(2, Math.min(rows, Math.round((band.sigma * 0.35) / perRow))) : 4;
  // As many steps of the instrument in each bin, or bins would be full and empty in turn.
  const step = (c.resolution ?? 0) / perRow;
  const gather = step >= 1 && step < rows ? Math.round(step * Math.max(1, Math.round(wanted / step))) : wanted;
  const counts = new Float64Array(Math.ceil(rows / gather));
  for (let i = trendLength - shown; i < trendLength; i++) {
    const y = axis.y(trend[i]!);
    if (y >= 0 && y < rows) counts[Math.floor(y / gather)]!++;
  }
  const scale = band ? (shown * gather * perRow) / band.sigma : 0;
  const expected = (y: number): number => (band ? scale * pdf((axis.high - y * perRow - band.centre) / band.sigma) : 0);
  const peak = Math.max(1, ...counts, scale * pdf(0));
  const reach = (count: number): number => Math.round((count / peak) * (right - left - 2));
  for (let y = 0; y < rows; y++) {
    const length = reach(counts[Math.floor(y / gather)]!);
    // Bars are stippled, so that the curve and the limits stay visible where they run through them without colour.
    for (let x = 0; x < length; x++) if (!r.fine || (x + y) % 2 === 0) r.dot(left + x, top + y, t.faint, BAR);
    if (length > 0) r.dot(left + length - 1, top + y, t.faint, BAR);
  }
  if (!band) return;
  let last = reach(expected(0));
  for (let y = 0; y < rows; y++) {
    const next = reach(expected(y));
    for (let x = Math.min(last, next); x <= Math.max(last, next); x++) if (next > 0 || last > 0) r.dot(left + x, top + y, t.plain, CURVE);
    last = next;
  }
}
