import fc from 'fast-check';
import { median as plainMedian, medianAbsoluteDeviation } from 'simple-statistics';
import { describe, expect, it } from 'vitest';
import { mad, median, middle, select } from '../../src/stats/quickselect.js';

// Multiples of 2^-8 in a small range: simple-statistics is exact on them.
const series = fc.array(fc.integer({ min: -5000, max: 5000 }).map((k) => k / 256), { minLength: 1, maxLength: 300 });

describe('selection in place', () => {
  it('median and MAD are those of simple-statistics', () =>
    fc.assert(
      fc.property(series, (values) => {
        expect(median(Float64Array.from(values), values.length)).toBe(plainMedian(values));
        const scratch = Float64Array.from(values);
        expect(mad(scratch, values.length, middle(scratch, values.length))).toBe(medianAbsoluteDeviation(values));
      }),
      { seed: 1 },
    ));
  it('finds every order statistic and leaves what lies beyond n alone', () =>
    fc.assert(
      fc.property(series, fc.nat(), (values, at) => {
        const k = at % values.length;
        const scratch = Float64Array.from([...values, -Infinity, Infinity]);
        expect(select(scratch, values.length, k)).toBe([...values].sort((a, b) => a - b)[k]! + 0);
        expect(Array.from(scratch.subarray(values.length))).toEqual([-Infinity, Infinity]);
        expect(Array.from(scratch.subarray(0, values.length)).sort()).toEqual(values.map((x) => x + 0).sort());
      }),
      { seed: 2 },
    ));
  it('of nothing is not a number', () => {
    expect(median(new Float64Array(0), 0)).toBeNaN();
    expect(mad(new Float64Array(0), 0, middle(new Float64Array(0), 0))).toBeNaN();
  });
  it('takes sorted, reversed and constant series in linear work', () => {
    for (const make of [(i: number) => i, (i: number) => -i, () => 1, (i: number) => i % 2, (i: number) => Math.abs(i - 1000)]) {
      const counted = new Proxy(Float64Array.from({ length: 2001 }, (_, i) => make(i)), counter());
      reads = 0;
      median(counted, 2001);
      expect(reads).toBeLessThan(40 * 2001);
    }
  });
});

let reads = 0;
const counter = (): ProxyHandler<Float64Array> => ({
  get: (target, key) => {
    reads++;
    return (target as unknown as Record<string | symbol, unknown>)[key];
  },
  set: (target, key, value: number) => {
    target[Number(key)] = value;
    return true;
  },
});
