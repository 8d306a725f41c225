import type { ChannelView } from './model.js';
import { dotColumn, histogramWidth } from './picture.js';
import type { Raster } from './raster.js';
import type { Theme } from './theme.js';

const D2 = 2 / Math.sqrt(Math.PI); // mean moving range of two normal readings, in sigmas
const D4 = 3.2665319191953556; // upper limit of the moving range over its mean, 1 + 3 d3 / d2 (ASTM MNL 7)

/**
 * The moving ranges of the readings shown: how rough the channel is, with their mean and limit as the band promises them.
 * @param gutter columns of the labels in the picture above
 */
export function drawSpread(r: Raster, t: Theme, c: ChannelView, row: number, height: number, span: number, gutter: number): void {
  r.text(0, row, 'spread'.padStart(gutter - 1), t.faint);
  const { band, trend, trendLength } = c;
  if (!band || height === 0) return;
  const aside = histogramWidth(r.width);
  const left = gutter * 2;
  const right = (r.width - aside) * 2 - 3;
  const rows = height * 4;
  const most = D2 * D4 * band.sigma * 1.15;
  const y = (range: number): number => row * 4 + rows - 1 - Math.round((Math.min(range, most) / most) * (rows - 1));
  r.level(left, right, y(D2 * band.sigma), t.faint, 1, 3, 2);
  r.level(left, right, y(D2 * D4 * band.sigma), t.plain, 2, 4, 1);
  const shown = Math.min(span, trendLength);
  for (let i = 1; i < shown; i++) {
    const at = trendLength - shown + i;
    const range = Math.abs(trend[at]! - trend[at - 1]!);
    if (Number.isNaN(range)) continue;
    r.upright(dotColumn(c.index, shown - 1 - i, span, left, right), y(range), row * 4 + rows - 1, t.faint, 3);
  }
  r.text(r.width - aside + 1, row, 'reading to', t.faint, aside - 1);
  r.text(r.width - aside + 1, row + 1, 'reading', t.faint, aside - 1);
}
