import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { peakedIntegral, peakFrom } from '../../src/stats/peakedIntegral.js';
import { close } from './fixture.js';

const scale = fc.double({ min: 0.05, max: 20, noNaN: true });

describe('integral of a peak', () => {
  it('of a Gaussian is sd sqrt(2 pi), however far its peak, first step and height are off', () =>
    fc.assert(
      fc.property(fc.double({ min: -30, max: 30, noNaN: true }), scale, scale, fc.double({ min: -2, max: 2, noNaN: true }), (centre, sd, step, off) => {
        fc.pre(step < 4 * sd);
        for (const height of [1, 1e-250]) {
          const f = (x: number): number => height * Math.exp((-(((x - centre) / sd) ** 2)) / 2);
          close(peakedIntegral(f, centre + off * sd, step), height * sd * Math.sqrt(2 * Math.PI), 1e-13, [centre, sd, step, off]);
        }
      }),
      { seed: 1 },
    ));
  it('of sech is pi', () => close(peakedIntegral((x) => 1 / Math.cosh(x), 0.1, 0.7), Math.PI, 1e-15, 'sech'));
  it('of nothing is nothing', () => expect(peakedIntegral(() => 0, 0, 1)).toBe(0));
  it('finds the peak on the side named, across a stretch where the function vanishes', () => {
    for (const peak of [0.3, 7, 2000]) {
      expect(Math.abs(peakFrom((x) => -((x - peak) ** 2), 0, 1, 0.1) - peak)).toBeLessThan(0.21);
      expect(Math.abs(peakFrom((x) => -((x + peak) ** 2), 0, -1, 0.1) + peak)).toBeLessThan(0.21);
    }
    expect(Math.abs(peakFrom((x) => (x < 30 ? -Infinity : -((x - 40) ** 2)), 0, 1, 0.1) - 40)).toBeLessThan(0.21);
  });
});
