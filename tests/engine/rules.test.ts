import { readFileSync } from 'node:fs';
import { describe, expect, it } from 'vitest';
import { Channel } from '../../src/engine/channel.js';
import { SUPPLEMENTARY_RULES, ZONE_RULES, type Rule } from '../../src/engine/rules.js';
import { spec } from './spec.js';

// Brute force from the definitions in Western Electric, Statistical Quality Control Handbook (1956) and Nelson, Journal
// of Quality Technology 16(4), 1984: tests/reference/rules.json, vectors invented.
interface Vector {
  name?: string;
  seed?: number;
  z: (number | null)[];
  signals: Record<string, number[]>;
}
const { cases, long } = JSON.parse(readFileSync(new URL('../reference/rules.json', import.meta.url), 'utf8')) as { cases: Vector[]; long: Vector[] };
const NINE: readonly Rule[] = [...ZONE_RULES, ...SUPPLEMENTARY_RULES];

/** Indices, counted over all readings with the missing ones, at which each rule signals. */
function signals(z: readonly (number | null)[], scale: number, rules: readonly Rule[]): Record<string, number[]> {
  const channel = new Channel(spec({ band: { centre: 0, sigma: scale }, rules }));
  const found: Record<string, number[]> = Object.fromEntries(rules.map((rule) => [rule, []]));
  z.forEach((value, i) => {
    if (value === null) return;
    for (const event of channel.take(i, value)) if (event.event === 'signal') found[event.detector]?.push(i);
  });
  return found;
}

describe('run rules signal at exactly the readings of the reference', () => {
  it.each(cases)('$name', ({ z, signals: expected }) => {
    expect(signals(z, 1, NINE)).toEqual(expected);
  });

  it.each(long)('long series $seed', ({ z, signals: expected }) => {
    expect(signals(z, 1000, NINE)).toEqual(expected);
  });

  it.each(NINE)('%s signals alike when it is alone', (rule) => {
    for (const { z, signals: expected } of cases) expect(signals(z, 1, [rule])).toEqual({ [rule]: expected[rule] });
  });

  it('stretched by g = 2, signals as textbook zones do on half the deviations', () => {
    const [first] = long;
    const doubled = first!.z.map((z) => (z === null ? null : 2 * z));
    const channel = new Channel(spec({ band: { centre: 0, sigma: 1000 }, rules: ZONE_RULES, k: 6 }));
    const found: number[] = [];
    doubled.forEach((value, i) => {
      if (channel.take(i, value!).some((event) => event.event === 'signal' && event.detector === 'four-of-five-beyond-1')) found.push(i);
    });
    expect(found).toEqual(first!.signals['four-of-five-beyond-1']);
  });
});
