import fc from 'fast-check';
import { mean, sampleStandardDeviation } from 'simple-statistics';
import { describe, expect, it } from 'vitest';
import { moments } from '../../src/stats/moments.js';
import { close, reference } from './fixture.js';

interface Strd {
  sets: { id: string; certified: { mean: number; sd: number; lag1: number }; data: string[] }[];
}
const { sets } = reference('strd.json') as Strd;

/** Exact moments of the doubles, in whole numbers of 2^-60. */
function exact(values: readonly number[]): { mean: number; sd: number; lag1: number } {
  const x = values.map((value) => BigInt(value * 2 ** 60));
  const n = BigInt(x.length);
  const sum = x.reduce((a, b) => a + b, 0n);
  const d = x.map((value) => n * value - sum);
  const squares = d.reduce((total, value) => total + value * value, 0n);
  const products = d.slice(1).reduce((total, value, i) => total + value * d[i]!, 0n);
  const scale = 10n ** 40n;
  return {
    mean: Number((sum * scale) / (n * 2n ** 60n)) / 1e40,
    sd: Math.sqrt(Number((squares * scale) / (n * n * (n - 1n) * 2n ** 120n)) / 1e40),
    lag1: Number((products * scale) / squares) / 1e40,
  };
}

describe('moments of the NIST StRD univariate sets (tests/reference/strd.json)', () => {
  it.each(sets)('$id: certified values, as far as doubles hold the data', ({ data, certified }) => {
    const values = data.map(Number);
    const found = moments(values);
    // A datum such as 10000000.1 is itself rounded, by up to half a unit in the last place, before anything is computed.
    const rounding = Math.max(...values) * 2 ** -53;
    close(found.mean, certified.mean, 2e-15, 'mean');
    close(found.sd, certified.sd, 2e-15 + (2 * rounding) / certified.sd, 'sd');
    close(found.lag1, certified.lag1, 1e-14 + (8 * rounding) / certified.sd, 'lag1');
  });
  it.each(sets)('$id: exact for the doubles (whole-number arithmetic)', ({ data }) => {
    const values = data.map(Number);
    const found = moments(Float64Array.from(values));
    const expected = exact(values);
    close(found.mean, expected.mean, 3e-16, 'mean');
    close(found.sd, expected.sd, 1e-15, 'sd');
    close(found.lag1, expected.lag1, 2e-15, 'lag1');
  });
});

describe('moments', () => {
  it('agree with simple-statistics where that is exact: whole numbers', () =>
    fc.assert(
      fc.property(fc.array(fc.integer({ min: -1000, max: 1000 }), { minLength: 2, maxLength: 200 }), (values) => {
        const found = moments(values);
        expect(found.n).toBe(values.length);
        expect(Math.abs(found.mean - mean(values))).toBeLessThan(1e-12);
        expect(Math.abs(found.sd - sampleStandardDeviation(values))).toBeLessThan(1e-11);
      }),
      { seed: 1 },
    ));
  it('are exact for any doubles', () =>
    fc.assert(
      fc.property(fc.double({ min: -1e6, max: 1e6, noNaN: true }), fc.array(fc.double({ min: 1, max: 2, noNaN: true }), { minLength: 3, maxLength: 60 }), (offset, noise) => {
        const values = noise.map((x) => Math.round((offset + x) * 2 ** 30) / 2 ** 30);
        fc.pre(new Set(values).size > 1);
        const expected = exact(values);
        close(moments(values).sd, expected.sd, 2e-15, values);
        expect(Math.abs(moments(values).lag1 - expected.lag1)).toBeLessThan(2e-15);
      }),
      { seed: 2 },
    ));
  it('of too few values are not numbers', () => {
    expect(moments([])).toEqual({ n: 0, mean: NaN, sd: NaN, lag1: NaN });
    expect(moments([3])).toEqual({ n: 1, mean: 3, sd: NaN, lag1: NaN });
    expect(moments([3, 3])).toEqual({ n: 2, mean: 3, sd: 0, lag1: NaN });
  });
});
