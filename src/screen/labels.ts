import { formatValue } from '../engine/format.js';
import type { Axis } from './axis.js';
import type { ChannelView } from './model.js';
import type { Raster } from './raster.js';
import type { Theme } from './theme.js';

export const GUTTER = 10; // columns for the labels of the value axis, at least
const WIDEST = 20;

interface Label {
  readonly value: number;
  readonly text: string;
  readonly attrs: number;
}

/** What the axis says, the weightiest first. */
export function axisLabels(t: Theme, { band, tolerance, resolution }: ChannelView, { low, high }: Axis): Label[] {
  const sigma = band?.sigma ?? (high - low) / 10;
  const label = (value: number, attrs: number, mark = ''): Label => ({ value, attrs, text: formatValue(value, sigma, resolution) + mark });
  return [
    ...(band ? [band.high, band.low, band.centre].map((value) => label(value, t.plain)) : []),
    ...(tolerance ?? []).map((value) => label(value, t.faint, ' tol')),
    label(high, t.faint),
    label(low, t.faint),
  ].filter(({ value }) => value >= low && value <= high);
}

/** Columns at the left of the picture: in steps of two, so that a label which gains or loses a digit does not move it each time. */
export function gutterOf(labels: readonly Label[]): number {
  return Math.min(WIDEST, 2 * Math.ceil(labels.reduce((widest, { text }) => Math.max(widest, text.length + 1), GUTTER) / 2));
}

/** Each label at its line, flush right; one that is too long is cut where its last digits are, and says so. */
export function drawLabels(r: Raster, labels: readonly Label[], axis: Axis, row: number, height: number, width: number): void {
  const taken = new Set<number>();
  for (const { value, text, attrs } of labels) {
    const at = Math.max(0, Math.min(height - 1, axis.y(value) >> 2));
    if (taken.has(at)) continue;
    taken.add(at);
    r.text(0, row + at, text.padStart(width), attrs, width);
  }
}
