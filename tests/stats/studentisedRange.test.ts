import { describe, expect, it } from 'vitest';
import { tUpperTail } from '../../src/stats/student.js';
import {
  studentisedRangeCdf,
  studentisedRangeQuantile,
  studentisedRangeUpperQuantile,
  studentisedRangeUpperTail,
} from '../../src/stats/studentisedRange.js';
import { close, rows } from './fixture.js';

describe('studentised range', () => {
  it('both tails against quadrature at 25 and more digits (fixtures/studentisedRange.json)', () => {
    for (const [q, n, df, lower, upper] of rows('studentisedRange.json', 'studentisedRange') as [number, number, number, number, number][]) {
      close(studentisedRangeCdf(q, n, df), lower, 3e-13, [q, n, df]);
      close(studentisedRangeUpperTail(q, n, df), upper, 3e-13, [q, n, df]);
    }
  });
  // Upper 5 % and 1 % points as handbooks of experimental design print them (Pearson and Hartley, Biometrika Tables,
  // table 29); from memory.
  it.each([
    [0.05, 2, 10, 3.15],
    [0.05, 3, 10, 3.88],
    [0.05, 3, 20, 3.58],
    [0.05, 5, 20, 4.23],
    [0.05, 10, 30, 4.82],
    [0.05, 3, Infinity, 3.31],
    [0.05, 10, Infinity, 4.47],
    [0.01, 3, 10, 5.27],
    [0.01, 5, 20, 5.29],
    [0.05, 4, 60, 3.74],
  ])('upper %d, %d readings, %d degrees of freedom: %d', (alpha, n, df, q) => expect(Math.abs(studentisedRangeUpperQuantile(alpha, n, df) - q)).toBeLessThan(0.0055));

  it('of two readings is sqrt 2 times |t|, into the far tail', () => {
    for (const df of [1, 4.5, 30, 1e5, Infinity])
      for (const q of [0.01, 2, 10, 40]) {
        const tail = 2 * tUpperTail(q / Math.SQRT2, df);
        if (tail > 1e-280) close(studentisedRangeUpperTail(q, 2, df), tail, 1e-12, [q, df]);
      }
  });
  it('laws: tails add up to 1; grows with q, falls with n; the quantile inverts both tails', () => {
    for (const df of [3, 20])
      for (const n of [2, 6])
        for (const q of [0.5, 4]) {
          const lower = studentisedRangeCdf(q, n, df);
          close(lower + studentisedRangeUpperTail(q, n, df), 1, 1e-14, [q, n, df]);
          expect(studentisedRangeCdf(q * 1.01, n, df)).toBeGreaterThan(lower);
          expect(studentisedRangeCdf(q, n + 1, df)).toBeLessThan(lower);
          close(studentisedRangeQuantile(lower, n, df), q, 1e-11, [q, n, df]);
          const upper = studentisedRangeUpperTail(q, n, df);
          if (upper < 0.9) close(studentisedRangeUpperQuantile(upper, n, df), q, 1e-11, [q, n, df]);
        }
  });
  it('is NaN outside its domain', () => {
    for (const x of [studentisedRangeCdf(1, 1, 3), studentisedRangeCdf(1, 3, 0), studentisedRangeUpperTail(NaN, 3, 3), studentisedRangeQuantile(-0.1, 3, 3)]) expect(x).toBeNaN();
    expect([studentisedRangeCdf(0, 3, 3), studentisedRangeUpperTail(0, 3, 3), studentisedRangeCdf(Infinity, 3, 3), studentisedRangeUpperQuantile(0, 3, 3)]).toEqual([0, 1, 1, Infinity]);
  });
});
