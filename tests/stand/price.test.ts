import { readFileSync } from 'node:fs';
import { describe, expect, it } from 'vitest';
import { price, priceWords, standPrice } from '../../src/stand/price.js';
import { loadStand } from '../../src/stand/load.js';
import type { Rule } from '../../src/engine/rules.js';
import { spec } from '../engine/spec.js';
import { GOOD, standFile } from './files.js';

interface Entry {
  rules: Rule[];
  side_run: number;
  limit_scale: number;
  shift: number;
  arl: number;
}

describe('the price of run rules', () => {
  // tests/reference/runlength.json: exact chains; its values at scale 1 agree with Champ and Woodall, Technometrics 29(4) 1987.
  const { zone_rules } = JSON.parse(readFileSync(new URL('../reference/runlength.json', import.meta.url), 'utf8')) as { zone_rules: Entry[] };
  it.each(zone_rules.filter(({ shift }) => shift === 0))('$rules, side run $side_run, scale $limit_scale: one false alarm in $arl readings', ({ rules, side_run, limit_scale, arl }) => {
    expect(price(spec({ rules, k: 3 * limit_scale, sideRun: side_run }))!.readings / arl).toBeCloseTo(1, 9);
  });

  it('is time where the interval is known, and says what it leaves out', () => {
    expect(priceWords(spec({ rules: ['one-beyond-3', 'trend-of-6'], every: 100 }))).toBe('one false alarm in 370 readings, every 37 s; trend-of-6 not counted in');
    expect(price(spec({ rules: ['trend-of-6'] }))).toBeNull();
  });

  it('adds up over the stand', () => {
    const two = GOOD.replace('rules: [one-beyond-3, eight-one-side]', 'rules: [one-beyond-3]').replace('band: learn 500', 'band: learn 500\n    rules: [one-beyond-3]');
    const each = 370.3983473449592; // tests/reference/runlength.json, shewhart k 3
    expect(standPrice(loadStand(standFile(two)))).toBeCloseTo(1 / (1 / (each * 100) + 1 / (each * 1000)), 3);
  });
});
