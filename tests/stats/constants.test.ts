import { describe, expect, it } from 'vitest';
import { c4, d2, d3 } from '../../src/stats/constants.js';
import { close, reference, rows } from './fixture.js';

interface Reference {
  computed: ({ n: number; c4: number; d2: number; d3: number } & Record<string, number>)[];
  c4_large: { n: number; c4: number }[];
  published: Record<string, Record<string, number>>;
}
const known = reference('constants.json') as Reference;

/** The chart factors made from the three constants, as ASTM E2587 defines them. */
function factors(n: number): Record<string, number> {
  const [c, mean, sd] = [c4(n), d2(n), d3(n)];
  const spread = (3 * Math.sqrt(1 - c * c)) / c;
  const range = (3 * sd) / mean;
  return {
    c4: c, d2: mean, d3: sd,
    A2: 3 / (mean * Math.sqrt(n)), A3: 3 / (c * Math.sqrt(n)), E2: 3 / mean,
    B3: Math.max(0, 1 - spread), B4: 1 + spread, D3: Math.max(0, 1 - range), D4: 1 + range,
  };
}

describe('control chart constants', () => {
  it.each(known.computed)('n = $n: c4, d2, d3 and the chart factors (tests/reference/constants.json, given to 1e-10)', ({ n, ...expected }) => {
    const found = factors(n);
    for (const [name, value] of Object.entries(expected)) close(found[name]!, value, 1e-10, [name, n]);
  });
  it.each(known.c4_large)('c4($n)', ({ n, c4: expected }) => close(c4(n), expected, 1e-13, n));

  it.each(Object.entries(known.published))('n = %s: as the tables of ASTM MNL 7 print them (from memory)', (n, printed) => {
    const found = factors(Number(n));
    for (const [name, value] of Object.entries(printed)) {
      const digits = String(value).split('.')[1]?.length ?? 0;
      expect(Math.abs(found[name]! - value), name).toBeLessThanOrEqual(0.5001 * 10 ** -Math.max(3, digits));
    }
  });
  it('c4 against 50-digit values, real n from 2 to 1e12 (fixtures/constants.json)', () => {
    for (const [n, value] of rows('constants.json', 'c4') as [number, number][]) close(c4(n), value, 2e-15, n);
  });
  it('d2 and d3 against Tippett integrals at 30 digits, n from 2 to 1e6 (fixtures/constants.json)', () => {
    for (const [n, mean, sd] of rows('constants.json', 'range') as [number, number, number][]) {
      close(d2(n), mean, 1e-14, n);
      close(d3(n), sd, 1e-12, n);
    }
  });
  it('have closed forms for two and three readings', () => {
    close(d2(2), 2 / Math.sqrt(Math.PI), 1e-15, 2);
    close(d2(3), 3 / Math.sqrt(Math.PI), 1e-15, 3);
    close(d3(2), Math.sqrt(2 - 4 / Math.PI), 1e-14, 2);
    close(c4(2), Math.sqrt(2 / Math.PI), 1e-15, 2);
  });
  it('change with n one way each, also between whole numbers', () => {
    for (let n = 2; n < 40; n += 0.5) {
      expect(c4(n + 0.5)).toBeGreaterThan(c4(n));
      expect(d2(n + 0.5)).toBeGreaterThan(d2(n));
    }
  });
  it('are not numbers below n = 2', () => {
    for (const constant of [c4, d2, d3]) for (const n of [1.9, 0, -3, NaN]) expect(constant(n)).toBeNaN();
  });
});
