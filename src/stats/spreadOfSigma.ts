import { stirlingRemainder } from './gamma.js';

/** Density of s / sigma at x for a sample standard deviation with `df` degrees of freedom (chi divided by sqrt(df)). */
export function spreadDensity(df: number): (x: number) => number {
  const scale = 2 * Math.sqrt(df / (4 * Math.PI)) * Math.exp(-stirlingRemainder(df / 2));
  return (x) => (x <= 0 ? 0 : (scale * Math.exp((df / 2) * (2 * Math.log(x) - x * x + 1))) / x);
}

/** The interval outside which that density may be neglected at double precision. */
export function spreadSupport(df: number): readonly [low: number, high: number] {
  const sd = 1 / Math.sqrt(2 * df);
  return [Math.max(0, 1 - 11 * sd), 1 + 11 * sd + (df < 10 ? 3 : 0)];
}
