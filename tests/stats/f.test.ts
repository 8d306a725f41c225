import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { fCdf, fQuantile, fUpperQuantile, fUpperTail } from '../../src/stats/f.js';
import { tUpperTail } from '../../src/stats/student.js';
import { close, rows } from './fixture.js';

describe('F', () => {
  it('both tails and quantiles against mpmath (fixtures/continuous.json)', () => {
    for (const [x, a, b, lower, upper] of rows('continuous.json', 'f') as [number, number, number, number, number][]) {
      close(fCdf(x, a, b), lower, 2e-13, [x, a, b]);
      close(fUpperTail(x, a, b), upper, 2e-13, [x, a, b]);
      if (lower < 0.6) close(fQuantile(lower, a, b), x, 2e-14, [x, a, b]);
      if (upper < 0.6) close(fUpperQuantile(upper, a, b), x, 2e-14, [x, a, b]);
    }
  });
  // Upper percentage points as every statistics handbook prints them; from memory.
  it.each([
    [1, 10, 0.05, 4.96],
    [5, 10, 0.05, 3.33],
    [10, 10, 0.05, 2.98],
    [3, 20, 0.01, 4.94],
    [2, 60, 0.05, 3.15],
    [4, 30, 0.025, 3.25],
  ])('%d and %d degrees of freedom, upper %d: %d', (a, b, q, x) => expect(fUpperQuantile(q, a, b)).toBeCloseTo(x, 2));

  const df = fc.double({ min: 0.5, max: 1e4, noNaN: true });
  it('laws: tails add up to 1; F(1, v) is t squared; 1/F swaps the degrees of freedom; the quantile inverts', () =>
    fc.assert(
      fc.property(fc.double({ min: 1e-4, max: 1e4, noNaN: true }), df, df, (x, a, b) => {
        const lower = fCdf(x, a, b);
        close(lower + fUpperTail(x, a, b), 1, 1e-15, [x, a, b]);
        if (lower > 1e-280) close(fUpperTail(1 / x, b, a), lower, 1e-10, [x, a, b]);
        const tail = fUpperTail(x, 1, b);
        if (tail > 1e-280) close(2 * tUpperTail(Math.sqrt(x), b), tail, 1e-11, [x, b]);
        if (lower > 1e-280 && lower < 0.9) close(fCdf(fQuantile(lower, a, b), a, b), lower, 1e-10, [x, a, b]);
      }),
      { seed: 1 },
    ));
  it('is NaN outside its domain', () => {
    for (const x of [fCdf(1, 0, 2), fCdf(NaN, 1, 1), fQuantile(2, 1, 1), fUpperTail(1, 1, -1), fUpperQuantile(0.5, 0, 1)]) expect(x).toBeNaN();
    expect([fCdf(-1, 2, 3), fUpperTail(0, 2, 3), fCdf(Infinity, 2, 3), fQuantile(0, 2, 3), fQuantile(1, 2, 3)]).toEqual([0, 1, 1, 0, Infinity]);
  });
});
