import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { drawPicture } from '../../src/screen/picture.js';
import { drawRoster } from '../../src/screen/roster.js';
import { Raster } from '../../src/screen/raster.js';
import { theme } from '../../src/screen/theme.js';
import { initialUi } from '../../src/screen/ui.js';
import type { ChannelView } from '../../src/screen/model.js';
import { band, channel, inventedStand } from './inventedStand.js';

const text = (r: Raster, row: number, from = 0, to = r.width): string => Array.from({ length: to - from }, (_, x) => r.glyph(row * r.width + from + x)).join('');

function raster(width: number, height: number): Raster {
  const r = new Raster('braille');
  r.resize(width, height);
  r.clear();
  return r;
}

/** Numbers at the left of the picture, and whether each was cut. */
function labels(c: ChannelView, width = 80): { number: number; cut: boolean }[] {
  const r = raster(width, 14);
  const gutter = drawPicture(r, theme(256), c, 0, 14, 120);
  return Array.from({ length: 14 }, (_, row) => text(r, row, 0, gutter).trim())
    .filter((label) => label !== '')
    .map((label) => ({ number: parseFloat(label), cut: label.endsWith('…') }));
}

describe('a number on the axis is whole, or is seen to be cut', () => {
  it.each([
    ['air pressure with a tolerance', 101_325.25, 0.4, 0.01, [101_324.5, 101_326] as const],
    ['a counter', 1_013_250.1, 0.5, 0.1, null],
    ['a tiny current', 0.000_001_25, 0.000_000_01, null, null],
    ['negative, with many digits', -123_456.789, 0.001, null, null],
  ])('%s', (_, centre, sigma, resolution, tolerance) => {
    const trend = Float64Array.from({ length: 200 }, (_, i) => centre + sigma * Math.sin(i));
    const shown = labels(channel(0, { band: band(centre, sigma), trend, trendLength: 200, index: 199, resolution, tolerance }));
    expect(shown.length).toBeGreaterThanOrEqual(3);
    for (const { number, cut } of shown) {
      expect(cut).toBe(false);
      expect(Math.abs(number - centre)).toBeLessThanOrEqual(8 * sigma); // a leading digit lost would be far away
    }
  });

  it('for any band', () => {
    fc.assert(
      fc.property(fc.constantFrom(-1, 1), fc.double({ min: 1, max: 1e8, noNaN: true }), fc.double({ min: 1e-3, max: 1e3, noNaN: true }), (sign, size, sigma) => {
        const centre = sign * size;
        const trend = new Float64Array(200).fill(centre);
        const shown = labels(channel(0, { band: band(centre, sigma), trend, trendLength: 200, index: 199, resolution: null }));
        for (const { number, cut } of shown) if (!cut) expect(Math.abs(number - centre)).toBeLessThanOrEqual(8 * sigma);
      }),
      { seed: 20310509, numRuns: 300 },
    );
  });
});

it('a unit that has no room ends in an ellipsis: half a unit is another one', () => {
  const r = raster(80, 3);
  drawRoster(r, theme(256), inventedStand({ channels: [channel(0, { unit: 'mm/s', value: 12_345_678.25 })] }), initialUi(), 0, 1, 0);
  const row = text(r, 0);
  expect(row).toContain('12345678.25');
  expect(row).not.toMatch(/mm?\/?s? /);
  expect(row).toMatch(/12345678\.25 \S*…/);
});

describe('the rulers of the roster hold the limits', () => {
  const rows = (k: number, width: number, name = 'flow'): string[] => {
    const r = raster(width, 3);
    const c = channel(0, { channel: name, band: band(82.4, 0.12, { k, low: 82.4 - k * 0.12, high: 82.4 + k * 0.12 }), z: 0.05 });
    drawRoster(r, theme(256), inventedStand({ channels: [c, channel(1, { z: k - 0.02 }), channel(2, { z: -9 })] }), initialUi(), 0, 3, 0);
    return [0, 1, 2].map((row) => text(r, row));
  };

  it.each([[3, 80], [3, 200], [4.9, 80], [5.4, 120], [5.99, 80], [6.7, 80], [7.5, 200]])('however far out a small budget sets them: k = %d at %i columns', (k, width) => {
    const [first, second, third] = rows(k, width) as [string, string, string];
    const [low, high] = [first.indexOf('│'), first.lastIndexOf('│')];
    expect(low).toBeGreaterThan(0);
    expect(high).toBeGreaterThan(low);
    expect(Math.abs(first.indexOf('●') - (low + high) / 2)).toBeLessThanOrEqual(1); // the centre lies half way
    expect(Math.abs(second.indexOf('●') - high)).toBeLessThanOrEqual(1); // a row of another band has the same scale
    expect(third).toContain('◂');
  });

  it('at any width, with names of any length', () => {
    fc.assert(
      fc.property(fc.double({ min: 2, max: 7.9, noNaN: true }), fc.integer({ min: 60, max: 260 }), fc.integer({ min: 1, max: 40 }), (k, width, length) => {
        const [first] = rows(k, width, 'n'.repeat(length)) as [string];
        expect(first.split('│').length - 1).toBe(2);
        expect(first.indexOf('│')).toBeLessThan(first.indexOf('●'));
        expect(first.indexOf('●')).toBeLessThan(first.lastIndexOf('│'));
      }),
      { seed: 20310512 },
    );
  });
});
