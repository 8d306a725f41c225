import { readFileSync } from 'node:fs';
import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { Channel } from '../../src/engine/channel.js';
import { spec } from './spec.js';

// Exact rationals, rounded to double: tests/reference/rolling.json.
interface Case {
  series: string;
  x: number[];
  windows: { window: number; columns: string[]; expected: (number | null)[][] }[];
}
const { cases } = JSON.parse(readFileSync(new URL('../reference/rolling.json', import.meta.url), 'utf8')) as { cases: Case[] };

/** A channel of which only the window matters. */
const windowOf = (window: number): Channel => new Channel(spec({ window, rules: [] }));

describe.each(cases)('rolling window, $series', ({ x, windows }) => {
  it.each(windows)('of $window readings holds 1e-12', ({ window, expected }) => {
    const rolling = windowOf(window);
    const scale = (from: number, to: number): number => Math.max(...x.slice(from, to).map(Math.abs));
    x.forEach((value, i) => {
      rolling.take(0, value);
      const { mean, sd, median, mad, min, max } = rolling.statistics();
      const found = [mean, sd, median, mad, min, max];
      expected[i]!.forEach((exact, column) => {
        const got = found[column]!;
        if (exact === null) expect(got).toBeNaN();
        // A zero has no relative error: there one unit in the last place of the readings themselves is allowed.
        else if (exact === 0) expect(Math.abs(got)).toBeLessThanOrEqual(scale(Math.max(0, i + 1 - window), i + 1) * 2 ** -52);
        else expect(Math.abs(got / exact - 1), `reading ${i}, column ${column}: ${got} for ${exact}`).toBeLessThan(1e-12);
      });
    });
  });
});

describe('rolling window', () => {
  it('is the window of the newest readings whatever its size (against a plain loop)', () => {
    fc.assert(
      fc.property(
        fc.integer({ min: 2, max: 60 }),
        fc.array(fc.integer({ min: -1000, max: 1000 }), { minLength: 1, maxLength: 300 }),
        (size, readings) => {
          const rolling = windowOf(size);
          readings.forEach((reading, i) => {
            rolling.take(0, reading);
            const held = readings.slice(Math.max(0, i + 1 - size), i + 1);
            const mean = held.reduce((a, b) => a + b, 0) / held.length;
            const squares = held.reduce((sum, v) => sum + (v - mean) ** 2, 0);
            expect(rolling.statistics().n).toBe(held.length);
            expect(rolling.mean()).toBeCloseTo(mean, 9);
            if (held.length > 1) expect(rolling.sd()).toBeCloseTo(Math.sqrt(squares / (held.length - 1)), 9);
            expect(rolling.min()).toBe(Math.min(...held));
            expect(rolling.max()).toBe(Math.max(...held));
            const out = new Float64Array(size);
            expect([...out.subarray(0, rolling.copyWindow(out))]).toEqual(held);
          });
        },
      ),
      { seed: 2, numRuns: 60 },
    );
  });

  it('does not drift over two million readings at offset 1e9 and sd 1e-3', () => {
    const size = 500;
    const rolling = windowOf(size);
    let random = 12345;
    const newest: number[] = [];
    for (let i = 0; i < 2_000_000; i++) {
      random = (Math.imul(random, 1664525) + 1013904223) >>> 0;
      const x = 1e9 + (random / 2 ** 32 - 0.5) * 3.4e-3;
      rolling.take(0, x);
      if (i >= 2_000_000 - size) newest.push(x);
    }
    // Differences from 1e9 are exact in doubles, so a plain two-pass loop over them is good to 1e-13.
    const d = newest.map((x) => x - 1e9);
    const mean = d.reduce((a, b) => a + b, 0) / size;
    const sd = Math.sqrt(d.reduce((sum, v) => sum + (v - mean) ** 2, 0) / (size - 1));
    expect(Math.abs(rolling.sd() / sd - 1)).toBeLessThan(1e-12);
  });
});
