import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { drawPicture, histogramWidth } from '../../src/screen/picture.js';
import { Raster } from '../../src/screen/raster.js';
import { theme } from '../../src/screen/theme.js';
import type { ChannelView } from '../../src/screen/model.js';
import { band, channel } from './inventedStand.js';

// Dots of a braille cell by row, from the Unicode standard (block 2800, dots 1 to 8): an oracle apart from the raster's own table.
const ROW_BITS = [0x01 | 0x08, 0x02 | 0x10, 0x04 | 0x20, 0x40 | 0x80];

/** Quarter rows of the picture in which most cells between two columns have dots. */
function filledRows(r: Raster, from: number, to: number, share: number): number[] {
  const rows: number[] = [];
  for (let y = 0; y < r.height; y++)
    for (const [quarter, bits] of ROW_BITS.entries()) {
      let filled = 0;
      for (let x = from; x < to; x++) {
        const code = r.glyph(y * r.width + x).codePointAt(0)!;
        if (code >= 0x2800 && code <= 0x28ff && (code - 0x2800) & bits) filled++;
      }
      if (filled >= share * (to - from)) rows.push(y * 4 + quarter);
    }
  return rows;
}

/** The picture, and the columns of its labels. */
function picture(c: ChannelView, width: number, height: number): [Raster, number] {
  const r = new Raster('braille');
  r.resize(width, height);
  r.clear();
  return [r, drawPicture(r, theme(256), c, 0, height, 120)];
}

const CENTRES = fc.double({ min: -1e6, max: 1e6, noNaN: true });
const SIGMAS = fc.double({ min: 1e-3, max: 1e3, noNaN: true });
const SIZES = fc.tuple(fc.integer({ min: 60, max: 240 }), fc.integer({ min: 8, max: 50 }));

describe('trend and histogram share one value axis', () => {
  it('the limit lines lie in the same rows of both', () => {
    fc.assert(
      fc.property(CENTRES, SIGMAS, SIZES, fc.double({ min: -8, max: 8, noNaN: true }), (centre, sigma, [width, height], z) => {
        const constant = new Float64Array(200).fill(centre);
        constant[0] = centre + z * sigma; // one reading far out stretches the axis of both
        const [r, gutter] = picture(channel(0, { band: band(centre, sigma), trend: constant, trendLength: 120, resolution: null, tolerance: null }), width, height);
        const split = width - histogramWidth(width);
        const trend = filledRows(r, gutter + 2, split - 4, 0.99);
        const histogram = filledRows(r, split + 2, width - 1, 0.99);
        const both = trend.filter((row) => histogram.includes(row));
        expect(both.length).toBeGreaterThanOrEqual(3); // both limits, and the centre
        expect(both[0]).toBe(trend[0]); // the highest line of each
        expect(histogram[0]).toBe(trend[0]);
        expect(histogram.at(-1)).toBe(trend.at(-1)); // and the lowest
        const middle = (both[0]! + both.at(-1)!) / 2; // the centre lies half way between the limits
        expect(both.some((row) => Math.abs(row - middle) <= 1)).toBe(true);
      }),
      { seed: 20310507, numRuns: 300 },
    );
  });

  it('readings at one value fill the bar that lies at their row', () => {
    fc.assert(
      fc.property(SIZES, fc.double({ min: -2.5, max: 2.5, noNaN: true }), ([width, height], z) => {
        const [centre, sigma] = [82.4, 0.12];
        const trend = new Float64Array(200).fill(centre + z * sigma);
        const [r, gutter] = picture(channel(0, { band: band(centre, sigma), trend, trendLength: 120, resolution: null }), width, height);
        const split = width - histogramWidth(width);
        const rows = filledRows(r, gutter + 2, split - 4, 1).filter((row) => filledRows(r, split + 2, width - 2, 1).includes(row));
        const expected = rows.find((row) => filledRows(r, split + 2, width - 2, 0.5).includes(row));
        expect(expected).toBeDefined();
      }),
      { seed: 20310508, numRuns: 100 },
    );
  });

  it('each limit has its label, in units, at its line', () => {
    const [r, gutter] = picture(channel(0), 80, 12);
    const label = (row: number): string => Array.from({ length: gutter }, (_, x) => r.glyph(row * 80 + x)).join('').trim();
    const lines = filledRows(r, gutter + 1, 30, 0.99).map((row) => label(row >> 2));
    expect(lines).toContain('82.76');
    expect(lines).toContain('82.04');
  });
});
