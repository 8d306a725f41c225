import { readFileSync } from 'node:fs';
import { describe, expect, it } from 'vitest';
import { zoneAutomaton, type ZonePattern } from '../../src/stats/zoneAutomaton.js';
import { zoneArl, zoneRunLength } from '../../src/stats/zoneRunLength.js';

interface Entry {
  rules: ZonePattern[];
  side_run: number;
  limit_scale: number;
  shift: number;
  arl: number;
  sdrl: number;
  median: number;
  p90: number;
}
const { zone_rules } = JSON.parse(readFileSync(new URL('../reference/runlength.json', import.meta.url), 'utf8')) as { zone_rules: Entry[] };

describe('run lengths of zone rules', () => {
  it.each(zone_rules)('$rules side run $side_run g $limit_scale shift $shift', ({ rules, side_run, limit_scale, shift, ...expected }) => {
    const found = zoneRunLength(rules, limit_scale, side_run, { shift, spread: 1 });
    expect(Math.abs(found.arl / expected.arl - 1)).toBeLessThan(1e-9);
    expect(Math.abs(found.sdrl / expected.sdrl - 1)).toBeLessThan(1e-8);
    expect([found.median, found.p90]).toEqual([expected.median, expected.p90]);
  });

  // Champ and Woodall, Technometrics 29(4) 1987, in-control values of their rule sets; from memory.
  const [one, two, four, eight]: ZonePattern[] = ['one-beyond-3', 'two-of-three-beyond-2', 'four-of-five-beyond-1', 'eight-one-side'];
  it.each([
    [[one!], 370.4],
    [[one!, two!], 225.44],
    [[one!, four!], 166.05],
    [[one!, eight!], 152.73],
    [[one!, two!, four!], 132.89],
    [[one!, two!, eight!], 122.05],
    [[one!, four!, eight!], 105.78],
    [[one!, two!, four!, eight!], 91.75],
  ])('%j has the published mean %d', (rules, published) => {
    expect(zoneArl(rules, 1)).toBeCloseTo(published, 2);
  });

  it('the four rules need 215 states', () => {
    // Champ and Woodall 1987 report as many for their rule set; counted here by minimisation.
    expect(zoneAutomaton([one!, two!, four!, eight!]).states).toBe(215);
  });

  it('keeps its relative accuracy where the mean is 1e9 readings and more', () => {
    // With one rule alone the run length is geometric: mean 1/p in closed form (p from exact fixtures of normal.json, z = 6.00).
    expect(zoneArl([one!], 2) * 1.973175290075396e-9).toBeCloseTo(1, 11);
  });
});
