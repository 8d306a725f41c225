import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { risingRoot } from '../../src/stats/root.js';
import { close } from './fixture.js';

describe('root of a rising function', () => {
  it('is found to the last digits from any guess, in few evaluations', () =>
    fc.assert(
      fc.property(fc.double({ min: -1e3, max: 1e3, noNaN: true }), fc.double({ min: 0.01, max: 50, noNaN: true }), (guess, goal) => {
        let calls = 0;
        const h = (x: number): number => (calls++, Math.sinh(x / 10) - Math.sinh(goal / 10));
        close(risingRoot(h, guess, 0.5), goal, 3e-15 * (1 + 10 / goal), [guess, goal]);
        expect(calls).toBeLessThan(60);
      }),
      { seed: 1 },
    ));
  it('is the guess where that is a root, and bears infinite values', () => {
    expect(risingRoot((x) => x - 3, 3, 1)).toBe(3);
    close(risingRoot((x) => (x > 0 ? Math.log(x) : -Infinity), -50, 0.5), 1, 3e-15, 'ln x');
  });
});
