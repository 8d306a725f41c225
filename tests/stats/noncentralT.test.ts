import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { noncentralTCdf, noncentralTQuantile, noncentralTUpperQuantile, noncentralTUpperTail } from '../../src/stats/noncentralT.js';
import { cdf, upperQuantile, upperTail } from '../../src/stats/normal.js';
import { tQuantile } from '../../src/stats/student.js';
import { close, rows } from './fixture.js';

describe('noncentral t', () => {
  it('both tails and quantiles against mpmath, 1 to 1e5 degrees of freedom (fixtures/noncentralT.json)', () => {
    for (const [t, df, delta, lower, upper] of rows('noncentralT.json', 'noncentralT') as [number, number, number, number, number][]) {
      close(noncentralTCdf(t, df, delta), lower, 3e-13, [t, df, delta]);
      close(noncentralTUpperTail(t, df, delta), upper, 3e-13, [t, df, delta]);
      if (t === 0 || df > 100) continue;
      if (lower < 0.6) close(noncentralTQuantile(lower, df, delta), t, 1e-12, [t, df, delta]);
      if (upper < 0.6) close(noncentralTUpperQuantile(upper, df, delta), t, 1e-12, [t, df, delta]);
    }
  });
  it('gives the one-sided tolerance factor of the NIST/SEMATECH e-Handbook, 7.2.6.3 (N = 43, p = 0.90, confidence 0.99: 1.8740; from memory)', () => {
    const n = 43;
    const k = noncentralTUpperQuantile(0.01, n - 1, upperQuantile(0.1) * Math.sqrt(n)) / Math.sqrt(n);
    expect(k).toBeCloseTo(1.874, 4);
  });
  it('is t where delta is 0, and normal where sigma is known', () => {
    for (const df of [1, 4, 33]) for (const p of [0.001, 0.3, 0.9]) close(noncentralTQuantile(p, df, 0), tQuantile(p, df), 1e-12, [p, df]);
    expect(noncentralTCdf(2, Infinity, 0.5)).toBe(cdf(1.5));
    expect(noncentralTUpperTail(2, Infinity, 0.5)).toBe(upperTail(1.5));
  });
  it('laws: tails add up to 1; reflection; falls as delta rises; the quantile inverts', () =>
    fc.assert(
      fc.property(
        fc.double({ min: -30, max: 30, noNaN: true }),
        fc.double({ min: 0.5, max: 3000, noNaN: true }),
        fc.double({ min: -10, max: 10, noNaN: true }),
        (t, df, delta) => {
          const lower = noncentralTCdf(t, df, delta);
          close(lower + noncentralTUpperTail(t, df, delta), 1, 1e-14, [t, df, delta]);
          if (lower > 1e-290) {
            close(noncentralTUpperTail(-t, df, -delta), lower, 1e-13, [t, df, delta]);
            expect(noncentralTCdf(t, df, delta + 0.01)).toBeLessThanOrEqual(lower * (1 + 1e-14));
          }
          if (lower > 1e-12 && lower < 0.999) close(noncentralTCdf(noncentralTQuantile(lower, df, delta), df, delta), lower, 1e-11, [t, df, delta]);
        },
      ),
      { seed: 1, numRuns: 60 },
    ));
  it('is NaN outside its domain', () => {
    for (const x of [noncentralTCdf(1, 0, 1), noncentralTCdf(1, 3, Infinity), noncentralTCdf(NaN, 3, 1), noncentralTQuantile(1.2, 3, 1), noncentralTUpperTail(1, -2, 0)])
      expect(x).toBeNaN();
    expect([noncentralTCdf(-Infinity, 3, 1), noncentralTCdf(Infinity, 3, 1), noncentralTQuantile(0, 3, 1), noncentralTUpperQuantile(0, 3, 1)]).toEqual([0, 1, -Infinity, Infinity]);
  });
});
