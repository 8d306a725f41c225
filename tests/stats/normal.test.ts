import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import * as normal from '../../src/stats/normal.js';
import { close, reference, rows } from './fixture.js';

interface Reference {
  cdf: { z: number; cdf: number; sf: number; two_sided_p: number }[];
  quantile: { p: number; z: number }[];
}
const known = reference('normal.json') as Reference;

describe('normal distribution against 60-digit values, tests/reference/normal.json', () => {
  it.each(known.cdf)('z = $z: both tails and the two-sided p', ({ z, cdf, sf, two_sided_p }) => {
    close(normal.cdf(z), cdf, 1e-14, z);
    close(normal.upperTail(z), sf, 1e-14, z);
    close(normal.twoSided(z), two_sided_p, 1e-14, z);
  });
  it.each(known.quantile)('p = $p: quantile', ({ p, z }) => close(normal.quantile(p), z, 1e-14, p));
});

describe('normal distribution against 60-digit values, fixtures/normal.json', () => {
  it('tails from 0 to 37.6 sigma', () => {
    for (const [z, tail] of rows('normal.json', 'upperTail') as [number, number][]) {
      close(normal.upperTail(z), tail, 2e-15, z);
      close(normal.cdf(-z), tail, 2e-15, z);
      if (tail > 0.1) close(Math.exp(normal.logUpperTail(z)), tail, 2e-15, z);
    }
  });
  it('quantiles from the smallest double to 1 - 1e-16', () => {
    for (const [p, z] of rows('normal.json', 'quantile') as [number, number][]) {
      close(normal.quantile(p), z, 2e-15, p);
      close(normal.upperQuantile(p), -z, 2e-15, p);
    }
  });
  it('intervals far out, narrow and wide, without cancellation', () => {
    for (const [a, b, p] of rows('normal.json', 'between') as [number, number, number][]) {
      close(normal.between(a, b), p, 1e-14, [a, b]);
      close(normal.between(-b, -a), p, 1e-14, [-b, -a]);
      close(Math.exp(normal.lnBetween(a, b)), p, 1e-13, [a, b]);
    }
  });
});

describe('normal distribution at its ends', () => {
  it('keeps the digits that a subnormal probability has', () => {
    // mpmath, 60 digits: 2.8854283600687843e-316, in steps of 4.94e-324
    expect(Math.abs(normal.upperTail(38) - 2.88542835e-316)).toBeLessThan(1e-323);
    expect(normal.between(-40, -38)).toBe(normal.upperTail(38));
  });
  it('quantile(5e-324) is -38.467405617144346 (mpmath)', () => close(normal.quantile(5e-324), -38.467405617144346, 1e-15, 5e-324));
  it('goes on in logarithms where no double is left', () => {
    // mpmath: ln erfc(50 / sqrt 2) / 2 and for 1e4
    close(normal.logUpperTail(50), -1254.8313611394199, 1e-14, 50);
    close(normal.logUpperTail(1e4), -50000010.129278915, 1e-15, 1e4);
  });
  it('answers infinite and impossible arguments', () => {
    expect([normal.cdf(-Infinity), normal.cdf(Infinity), normal.upperTail(Infinity), normal.pdf(Infinity)]).toEqual([0, 1, 0, 0]);
    expect([normal.quantile(0), normal.quantile(1), normal.upperQuantile(0)]).toEqual([-Infinity, Infinity, Infinity]);
    for (const x of [normal.cdf(NaN), normal.quantile(-0.1), normal.quantile(1.1), normal.between(NaN, 1), normal.upperQuantile(NaN)]) expect(x).toBeNaN();
    expect(normal.between(2, 1)).toBe(0);
    expect(normal.between(-Infinity, Infinity)).toBe(1);
  });
  it('centralQuantile holds its share from 1e-300 on', () => {
    close(normal.centralQuantile(1e-300), 1.2533141373155002e-300, 1e-15, 'p sqrt(pi / 2)'); // the density at the centre is 1 / sqrt(2 pi)
    for (const p of [1e-9, 0.01, 0.199, 0.2, 0.3, 0.5, 0.95, 0.9999]) close(1 - normal.twoSided(normal.centralQuantile(p)), p, 1e-7 * 1e-9 / p + 1e-12, p);
  });
});

describe('laws of the normal distribution', () => {
  const z = fc.double({ min: -37, max: 37, noNaN: true }).map((x) => Number(x.toFixed(12)));
  it('cdf + upperTail = 1, and symmetry', () =>
    fc.assert(
      fc.property(z, (x) => {
        close(normal.cdf(x) + normal.upperTail(x), 1, 1e-15, x);
        expect(normal.cdf(x)).toBe(normal.upperTail(-x));
        expect(normal.pdf(x)).toBe(normal.pdf(-x));
      }),
      { seed: 1 },
    ));
  it('quantile inverts the cdf as well as a double can tell', () =>
    fc.assert(
      fc.property(fc.double({ min: -37, max: 0, noNaN: true }), (x) => {
        expect(Math.abs(normal.quantile(normal.cdf(x)) - x)).toBeLessThan(1e-14 * Math.max(1, -x));
      }),
      { seed: 2 },
    ));
  it('falls: no step up at the seams of the methods', () =>
    fc.assert(
      fc.property(fc.constantFrom(-0.67, 0, 0.67, 5.65, 10, 37), fc.double({ min: 1e-13, max: 1e-3, noNaN: true }), (seam, d) => {
        expect(normal.upperTail(seam - d)).toBeGreaterThanOrEqual(normal.upperTail(seam + d));
      }),
      { seed: 3 },
    ));
  it('intervals add up', () =>
    fc.assert(
      fc.property(z, z, z, (...points) => {
        const [a, b, c] = points.sort((x, y) => x - y);
        close(normal.between(a, b) + normal.between(b, c), normal.between(a, c), 1e-13, points);
      }),
      { seed: 4 },
    ));
});
