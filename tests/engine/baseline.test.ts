import { readFileSync } from 'node:fs';
import { describe, expect, it } from 'vitest';
import { predictionLimit } from '../../src/engine/baseline.js';
import { Channel } from '../../src/engine/channel.js';
import { c4, d2 } from '../../src/stats/constants.js';
import { spec } from './spec.js';

const read = (file: string): unknown => JSON.parse(readFileSync(new URL(`../reference/${file}`, import.meta.url), 'utf8'));
// NIST StRD, univariate summary statistics: tests/reference/strd.json.
const { sets } = read('strd.json') as { sets: { id: string; n: number; certified: { mean: number; sd: number; lag1: number }; data: string[] }[] };

describe.each(sets)('NIST $id', ({ n, certified, data }) => {
  const channel = new Channel(spec({ band: { learn: n }, window: n, rules: [] }));
  data.forEach((text, i) => channel.take(i, Number(text)));
  // A decimal at 1e7 is rounded by up to 1e-9 before any computing, which is 1e-8 of an sd of 0.1.
  const stored = (2 ** -53 * certified.mean) / certified.sd;

  it('is learned as a band: the mean, and the certified sd over c4', () => {
    const { centre, sigma } = channel.band!;
    expect(Math.abs(centre / certified.mean - 1)).toBeLessThan(1e-14);
    expect(Math.abs((sigma * c4(n)) / certified.sd - 1)).toBeLessThan(1e-12 + stored);
  });

  it('has the certified mean, sd and lag-1 autocorrelation in a window', () => {
    expect(Math.abs(channel.mean() / certified.mean - 1)).toBeLessThan(1e-14);
    expect(Math.abs(channel.sd() / certified.sd - 1)).toBeLessThan(1e-12 + stored);
    expect(Math.abs(channel.lag1() - certified.lag1)).toBeLessThan(1e-12 + stored);
  });
});

describe('a learned band', () => {
  it('knows how uncertain it is: s / sqrt(n) for the centre, sigma sqrt(1 - c4^2) / c4 for sigma', () => {
    const channel = new Channel(spec({ band: { learn: 3 } }));
    [9, 10, 11].forEach((value, i) => channel.take(i, value));
    const { sigma, centreUncertainty, sigmaUncertainty } = channel.band!; // s = 1; c4(3): tests/reference/constants.json
    expect(sigma).toBeCloseTo(1 / 0.886226925452758, 12);
    expect(centreUncertainty).toBeCloseTo(1 / Math.sqrt(3), 12);
    expect(sigmaUncertainty).toBeCloseTo((sigma * Math.sqrt(1 - 0.886226925452758 ** 2)) / 0.886226925452758, 12);
  });

  it('is as good at an offset of 1e9 and an sd of 1e-3', () => {
    const channel = new Channel(spec({ band: { learn: 1000 } }));
    const values = Array.from({ length: 1000 }, (_, i) => 1e9 + (((i * 7919) % 1000) - 499.5) * 1e-6);
    values.forEach((value, i) => channel.take(i, value));
    const exact = values.map((x) => x - 1e9); // differences are exact
    const mean = exact.reduce((a, b) => a + b, 0) / 1000;
    const sd = Math.sqrt(exact.reduce((sum, d) => sum + (d - mean) ** 2, 0) / 999);
    expect(Math.abs((channel.band!.sigma * c4(1000)) / sd - 1)).toBeLessThan(1e-11);
  });
});

describe('the prediction limit of inconsistent', () => {
  it('comes down to k for a long baseline, and is k where none is known', () => {
    expect(predictionLimit({ n: 1e7, k: 3 })).toBeCloseTo(3, 5);
    expect(predictionLimit({ n: null, k: 3 })).toBe(3);
  });
});

describe('the individuals chart of the NIST/SEMATECH e-Handbook, 6.3.2.2', () => {
  const { individuals } = read('charts.json') as { individuals: { x: number[]; mean: number; mean_moving_range: number; upper: number; lower: number } };
  it('has the printed limits, and no reading beyond them', () => {
    const { x, mean, mean_moving_range, upper, lower } = individuals;
    const channel = new Channel(spec({ band: { centre: mean, sigma: mean_moving_range / d2(2) }, rules: ['one-beyond-3'] }));
    expect(channel.band!.high).toBeCloseTo(upper, 2);
    expect(channel.band!.low).toBeCloseTo(lower, 2);
    expect(x.flatMap((value, i) => [...channel.take(i, value)])).toEqual([]);
  });
});
