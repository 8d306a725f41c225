import type { ChannelView } from './model.js';

/** The value axis that the trend and the histogram beside it share. */
export interface Axis {
  readonly low: number;
  readonly high: number;
  /** Quarter row of a value, counted from the top of the picture; outside values give rows outside. */
  y(value: number): number;
}

/**
 * The axis for the newest `shown` readings: the limits with some room, widened to what was read, but not beyond four
 * times that, so that one wild reading does not press the band flat.
 * @param rows quarter rows of the picture
 */
export function valueAxis({ band, trend, trendLength, tolerance }: ChannelView, shown: number, rows: number): Axis | null {
  let low = Infinity;
  let high = -Infinity;
  for (let i = Math.max(0, trendLength - shown); i < trendLength; i++) {
    const value = trend[i]!;
    if (!Number.isFinite(value)) continue; // off the scale: marked at the edge
    if (value < low) low = value;
    if (value > high) high = value;
  }
  if (band) {
    const reach = (band.k + 0.7) * band.sigma;
    const most = 4 * reach;
    low = Math.max(band.centre - most, Math.min(low, band.centre - reach));
    high = Math.min(band.centre + most, Math.max(high, band.centre + reach));
    for (const line of tolerance ?? []) {
      if (line < low && line > band.centre - 1.5 * reach) low = line - 0.3 * band.sigma;
      if (line > high && line < band.centre + 1.5 * reach) high = line + 0.3 * band.sigma;
    }
  }
  if (!(low <= high)) return null;
  if (low === high) {
    const room = Math.abs(low) * 1e-3 || 1;
    low -= room;
    high += room;
  }
  const scale = (rows - 1) / (high - low);
  // rows far outside are cut, so that no later sum of them loses its meaning
  return { low, high, y: (value) => Math.max(-1e6, Math.min(1e6, Math.round((high - value) * scale))) };
}
