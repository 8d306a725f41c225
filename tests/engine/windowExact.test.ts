import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { Channel } from '../../src/engine/channel.js';
import { spec } from './spec.js';

const UNIT = 2 ** -20; // outliers of 1e12 and noise of one unit do not fit into one double: their sum must be kept in two

/** Mean and sd in whole numbers of UNIT, exact but for one rounding at the end. */
function exactly(held: readonly number[]): { mean: number; sd: number; scale: number } {
  const whole = held.map((x) => BigInt(x / UNIT));
  const n = BigInt(held.length);
  const sum = whole.reduce((a, b) => a + b, 0n);
  const squares = whole.reduce((a, b) => a + b * b, 0n);
  const m2 = n * squares - sum * sum; // n times the sum of squared deviations
  return {
    mean: (Number(sum) / held.length) * UNIT,
    sd: Math.sqrt(Number(m2) / held.length / (held.length - 1)) * UNIT,
    scale: Math.max(...held.map(Math.abs)),
  };
}

/** Readings on a level, with outliers up to twelve powers of ten above it, levels that jump, and runs of one value. */
const nasty = fc
  .array(
    fc.oneof(
      { weight: 12, arbitrary: fc.record({ kind: fc.constant('noise' as const), x: fc.integer({ min: -(2 ** 20), max: 2 ** 20 }) }) },
      { weight: 1, arbitrary: fc.record({ kind: fc.constant('outlier' as const), x: fc.integer({ min: -12, max: 12 }) }) },
      { weight: 1, arbitrary: fc.record({ kind: fc.constant('level' as const), x: fc.integer({ min: -9, max: 9 }) }) },
      { weight: 1, arbitrary: fc.record({ kind: fc.constant('run' as const), x: fc.integer({ min: 1, max: 40 }) }) },
    ),
    { minLength: 20, maxLength: 250, size: 'max' },
  )
  .map((steps) => {
    let level = 0;
    let last = 0;
    return steps.flatMap(({ kind, x }) => {
      if (kind === 'run') return Array.from({ length: x }, () => last);
      if (kind === 'level') level = Math.sign(x) * 10 ** Math.abs(x);
      last = kind === 'outlier' ? Math.sign(x) * 10 ** Math.abs(x) : level + x * UNIT;
      return [last];
    });
  });

describe('mean and sd of the window', () => {
  it('hold 1e-12 of the exact rationals on whatever comes, and extremes are those of the readings held', () => {
    fc.assert(
      fc.property(fc.integer({ min: 2, max: 90 }), nasty, (window, readings) => {
        const channel = new Channel(spec({ window, rules: [] }));
        readings.forEach((reading, i) => {
          channel.take(i, reading);
          const held = readings.slice(Math.max(0, i + 1 - window), i + 1);
          expect(channel.min()).toBe(Math.min(...held));
          expect(channel.max()).toBe(Math.max(...held));
          const { mean, sd, scale } = exactly(held);
          // Where readings cancel to next to nothing, 1e-12 of it may lie below what the sum's second double resolves.
          expect(Math.abs(channel.mean() - mean)).toBeLessThanOrEqual(1e-12 * Math.abs(mean) + 1e-26 * scale);
          if (held.length > 1) expect(Math.abs(channel.sd() - sd)).toBeLessThanOrEqual(1e-12 * sd);
        });
      }),
      { seed: 21, numRuns: 150 },
    );
  });

  it('go on from a snapshot at any reading as if nothing had been, to the last bit', () => {
    fc.assert(
      fc.property(fc.integer({ min: 2, max: 90 }), nasty, fc.nat(300), (window, readings, cut) => {
        const live = new Channel(spec({ window, rules: [] }));
        let restored = new Channel(live.spec);
        readings.forEach((reading, i) => {
          live.take(i, reading);
          restored.take(i, reading);
          if (i === cut) restored = Channel.restore(live.spec, restored.snapshot());
          expect([restored.mean(), restored.sd(), restored.min(), restored.max()]).toEqual([live.mean(), live.sd(), live.min(), live.max()]);
        });
      }),
      { seed: 22, numRuns: 60 },
    );
  });
});
