import { describe, expect, it } from 'vitest';
import { formatCount, formatOdds, formatValue } from '../../src/engine/format.js';

describe('numbers for people', () => {
  it.each([
    [8.1e-11, '1 in 1.2e10'],
    [1e-20, '1 in 1e20'],
    [0.002699796063260189, '1 in 370'], // beyond 3 sigma
    [6.334248366623985e-5, '1 in 15 800'], // beyond 4 sigma
  ])('odds of %d are %s', (p, words) => {
    expect(formatOdds(p)).toBe(words);
  });

  it('zeros of an exponent are no tail of a fraction', () => {
    expect(formatValue(1.234e10, 1e8)).toBe('1.234e10');
    expect(formatValue(5e20)).toBe('5e20');
    expect(formatValue(2e-10)).toBe('2e-10');
    expect(formatCount(3e30)).toBe('3e30');
  });

  it('a whole number keeps its zeros', () => {
    expect(formatValue(100000)).toBe('100000');
    expect(formatValue(120)).toBe('120');
  });
});
