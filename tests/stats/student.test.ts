import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { cdf, upperQuantile, upperTail } from '../../src/stats/normal.js';
import { noncentralTUpperTail } from '../../src/stats/noncentralT.js';
import { tCdf, tPdf, tQuantile, tUpperQuantile, tUpperTail } from '../../src/stats/student.js';
import { close, reference, rows } from './fixture.js';

describe("Student's t", () => {
  it('tails against mpmath, 0.5 to 1e9 degrees of freedom (fixtures/continuous.json)', () => {
    for (const [t, df, tail] of rows('continuous.json', 't') as [number, number, number][]) {
      close(tUpperTail(t, df), tail, 2e-13, [t, df]);
      close(tCdf(-t, df), tail, 2e-13, [t, df]);
      if (tail < 0.45) close(tUpperQuantile(tail, df), t, 1e-14, [t, df]);
    }
  });
  it('every quantile of tests/reference/normal.json, which is given to 1e-10', () => {
    const { t } = reference('normal.json') as { t: { df: number; p: number; quantile: number }[] };
    for (const { df, p, quantile } of t) close(tQuantile(p, df), quantile, 1e-10, [df, p]);
  });
  // Percentage points as every statistics handbook prints them; from memory.
  it.each([
    [1, 0.025, 12.706],
    [2, 0.025, 4.303],
    [5, 0.025, 2.571],
    [10, 0.05, 1.812],
    [20, 0.005, 2.845],
    [30, 0.025, 2.042],
    [120, 0.025, 1.98],
  ])('df %d, upper %d: %d', (df, q, t) => expect(tUpperQuantile(q, df)).toBeCloseTo(t, 3));

  it('df 1 is Cauchy, df 2 has its closed form, df Infinity is normal', () => {
    for (const t of [0.01, 0.5, 1, 3, 40, 1e6]) {
      close(tUpperTail(t, 1), Math.atan2(1, t) / Math.PI, 1e-14, t);
      const root = Math.sqrt(2 + t * t);
      close(tUpperTail(t, 2), 1 / (root * (root + t)), 1e-14, t);
      close(tUpperTail(t, Infinity), upperTail(t), 0, t);
    }
    expect(tUpperQuantile(0.01, Infinity)).toBe(upperQuantile(0.01));
    expect(tCdf(1, Infinity)).toBe(cdf(1));
  });
  it('agrees with the average of the normal tail over the sample sigma, another method', () => {
    for (const df of [1, 2.5, 7, 40, 1000]) for (const t of [0.3, 2, 9]) close(tUpperTail(t, df), noncentralTUpperTail(t, df, 0), 1e-13, [t, df]);
  });
  it('is NaN outside its domain', () => {
    for (const x of [tCdf(1, 0), tCdf(1, -1), tCdf(NaN, 3), tQuantile(2, 3), tQuantile(0.5, 0), tPdf(0, 0), tUpperQuantile(-1, 3)]) expect(x).toBeNaN();
    expect([tUpperQuantile(0, 3), tQuantile(0, 3), tQuantile(0.5, 3)]).toEqual([Infinity, -Infinity, 0]);
  });
  it('laws: cdf + upperTail = 1; symmetry; the quantile inverts; the density is the slope', () =>
    fc.assert(
      fc.property(fc.double({ min: -50, max: 50, noNaN: true }), fc.double({ min: 0.5, max: 1e6, noNaN: true }), (t, df) => {
        close(tCdf(t, df) + tUpperTail(t, df), 1, 1e-15, [t, df]);
        close(tCdf(t, df), tUpperTail(-t, df), 0, [t, df]);
        const q = tUpperTail(Math.abs(t), df);
        if (q > 1e-300 && Math.abs(t) > 1e-3) close(tUpperQuantile(q, df), Math.abs(t), 1e-11, [t, df]);
        const h = 1e-4 * (1 + Math.abs(t));
        if (Math.abs(t) < 8) close((tCdf(t + h, df) - tCdf(t - h, df)) / (2 * h), tPdf(t, df), 1e-3, [t, df]);
      }),
      { seed: 1 },
    ));
});
