import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { chiSquareCdf, chiSquareQuantile, chiSquareUpperQuantile, chiSquareUpperTail } from '../../src/stats/chiSquare.js';
import { twoSided } from '../../src/stats/normal.js';
import { close, reference, rows } from './fixture.js';

describe('chi-square', () => {
  it('both tails and quantiles against mpmath, 0.5 to 1e8 degrees of freedom (fixtures/continuous.json)', () => {
    for (const [x, df, lower, upper] of rows('continuous.json', 'chiSquare') as [number, number, number, number][]) {
      close(chiSquareCdf(x, df), lower, 2e-13, [x, df]);
      close(chiSquareUpperTail(x, df), upper, 2e-13, [x, df]);
      if (lower < 0.6) close(chiSquareQuantile(lower, df), x, 2e-14, [x, df]);
      if (upper < 0.6) close(chiSquareUpperQuantile(upper, df), x, 2e-14, [x, df]);
    }
  });
  it('every quantile of tests/reference/normal.json, which is given to 1e-10', () => {
    const { chi2 } = reference('normal.json') as { chi2: { df: number; p: number; quantile: number }[] };
    for (const { df, p, quantile } of chi2) close(chiSquareQuantile(p, df), quantile, 1e-10, [df, p]);
  });
  // Percentage points as every statistics handbook prints them; from memory.
  it.each([
    [1, 0.05, 3.841],
    [2, 0.05, 5.991],
    [5, 0.05, 11.07],
    [10, 0.05, 18.307],
    [10, 0.01, 23.209],
    [10, 0.95, 3.94],
    [30, 0.025, 46.979],
    [100, 0.05, 124.342],
  ])('df %d, upper %d: %d', (df, q, x) => expect(chiSquareUpperQuantile(q, df)).toBeCloseTo(x, 3));

  it('df 2 is exponential; df 1 is the square of a normal', () =>
    fc.assert(
      fc.property(fc.double({ min: 1e-6, max: 1300, noNaN: true }), (x) => {
        close(chiSquareUpperTail(x, 2), Math.exp(-x / 2), 1e-13, x);
        close(chiSquareCdf(x, 2), -Math.expm1(-x / 2), 1e-14, x);
        close(chiSquareUpperTail(x, 1), twoSided(Math.sqrt(x)), 3e-13, x);
      }),
      { seed: 1 },
    ));
  it('laws: tails add up to 1; the quantile inverts and rises', () =>
    fc.assert(
      fc.property(fc.double({ min: 1e-12, max: 0.999, noNaN: true }), fc.double({ min: 0.5, max: 1e5, noNaN: true }), (p, df) => {
        const x = chiSquareQuantile(p, df);
        close(chiSquareCdf(x, df), p, 1e-11, [p, df]);
        close(chiSquareCdf(x, df) + chiSquareUpperTail(x, df), 1, 1e-15, [p, df]);
        expect(chiSquareQuantile(p * 1.0005, df)).toBeGreaterThan(x);
      }),
      { seed: 2 },
    ));
  it('is NaN outside its domain', () => {
    for (const x of [chiSquareCdf(1, 0), chiSquareCdf(NaN, 1), chiSquareQuantile(1.5, 2), chiSquareUpperTail(1, -1), chiSquareQuantile(0.5, 0)]) expect(x).toBeNaN();
    expect([chiSquareCdf(-1, 3), chiSquareUpperTail(0, 3), chiSquareQuantile(0, 3), chiSquareQuantile(1, 3)]).toEqual([0, 1, 0, Infinity]);
  });
});
