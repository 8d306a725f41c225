import { describe, expect, it } from 'vitest';
import { price, priceWords, standPrice } from '../../src/stand/price.js';
import { loadStand } from '../../src/stand/load.js';
import { spec } from '../engine/spec.js';
import { GOOD, standFile } from './files.js';

describe('the price of run rules', () => {
  // Champ and Woodall, Technometrics 29(4) 1987; from memory, and exact in tests/reference/runlength.json.
  it.each([
    [['one-beyond-3'], 370.398],
    [['one-beyond-3', 'two-of-three-beyond-2', 'four-of-five-beyond-1', 'eight-one-side'], 91.75],
  ] as const)('%j: one false alarm in %d readings', (rules, published) => {
    expect(price(spec({ rules }))!.readings).toBeCloseTo(published, 2);
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
