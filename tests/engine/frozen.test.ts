import { describe, expect, it } from 'vitest';
import { Channel } from '../../src/engine/channel.js';
import { logChance, repeatsNeeded } from '../../src/engine/frozen.js';
import type { ChannelSpec } from '../../src/engine/spec.js';
import { deviates, rounded } from './series.js';
import { spec } from './spec.js';

const frozenAt = (over: Partial<ChannelSpec>, values: readonly number[]): number[] => {
  const channel = new Channel(spec({ rules: [], frozen: true, ...over }));
  return values.flatMap((value, i) => channel.take(i * 100, value).flatMap((event) => (event.event === 'signal' ? [event.index] : [])));
};

describe('the chance of one repeat', () => {
  // 2 Phi(r / 2 sigma) - 1. Near 0 it is r / sigma times the density at 0, 0.3989422804014327; at 6 and 20 it is one less the
  // two-sided tails beyond 3 and 10 (tests/reference/normal.json).
  it.each([
    [1, 1, Math.log(0.38292492254802621)],
    [1e-9, 1, Math.log(3.989422804014327e-10)],
    [6, 1, Math.log1p(-0.0026997960632601866)],
    [20, 1, -1.5239706048321052e-23],
  ])('at resolution %d and sigma %d is right to twelve digits', (resolution, sigma, expected) => {
    expect(Math.abs(logChance(resolution, sigma) / expected - 1)).toBeLessThan(1e-12);
  });

  it('asks for the first m with p^m below the odds, and for no fewer than four', () => {
    expect(repeatsNeeded(Math.log(0.1), 1.0001e-9)).toBe(9);
    expect(repeatsNeeded(Math.log(0.1), 0.9999e-9)).toBe(10);
    expect(repeatsNeeded(-1, Math.exp(-20))).toBe(21); // after 20 it is not below yet
    expect(repeatsNeeded(Math.log(1e-6), 1e-9)).toBe(4);
    expect(repeatsNeeded(0, 1e-9)).toBeGreaterThan(2 ** 30);
  });
});

describe('frozen', () => {
  it('judges an unknown resolution from the least step, after twenty steps and not before', () => {
    const thenStuck = (steps: number): number[] => {
      const walk = Array.from({ length: steps + 1 }, (_, i) => 40 + [0, 0.25, 1][i % 3]!);
      return [...walk, ...Array.from({ length: 100 }, () => walk.at(-1)!)];
    };
    expect(frozenAt({}, thenStuck(19))).toEqual([]);
    expect(frozenAt({}, thenStuck(20))).not.toEqual([]);
    expect(frozenAt({}, thenStuck(20))).toEqual(frozenAt({ resolution: 0.25 }, thenStuck(20)));
  });

  it('judges anew once a smaller step is seen', () => {
    const walk = [...Array.from({ length: 29 }, (_, i) => 40 + [0, 0.25, 1][i % 3]!), 40.05]; // from 40.25
    const stuck = [...walk, ...Array.from({ length: 100 }, () => 40.05)];
    expect(frozenAt({}, stuck)).toEqual(frozenAt({ resolution: 40.25 - 40.05 }, stuck));
  });

  it('says nothing where sigma is far below the resolution: every reading must repeat', () => {
    expect(frozenAt({ band: { centre: 40, sigma: 1e-6 }, resolution: 0.01 }, Array.from({ length: 1000 }, () => 40))).toEqual([]);
  });

  it('does not cry wolf in 200 000 readings of noise rounded to a fifth of a sigma', () => {
    const values = deviates(200_000, 3).map((z) => rounded(40 + 0.5 * z, 0.1));
    expect(frozenAt({ resolution: 0.1 }, values)).toEqual([]);
  });
});
