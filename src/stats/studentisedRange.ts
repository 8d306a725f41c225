import { rangeCdf, rangeUpperTail } from './normalRange.js';
import { risingRoot } from './root.js';
import { averageOverSpread } from './spreadOfSigma.js';

/**
 * The studentised range: the range of n >= 2 normal readings over an independent standard deviation with `df` > 0 degrees
 * of freedom (Infinity: sigma is known). NaN outside the domain.
 */

/** P(Q <= q). */
export function studentisedRangeCdf(q: number, n: number, df: number): number {
  if (!(n >= 2) || !(df > 0) || q !== q) return NaN;
  if (q <= 0) return 0;
  if (q === Infinity) return 1;
  return df === Infinity ? rangeCdf(q, n) : averageOverSpread(df, (s) => rangeCdf(q * s, n), 1);
}

/** P(Q > q). */
export function studentisedRangeUpperTail(q: number, n: number, df: number): number {
  if (!(n >= 2) || !(df > 0) || q !== q) return NaN;
  if (q <= 0) return 1;
  if (q === Infinity) return 0;
  return df === Infinity ? rangeUpperTail(q, n) : averageOverSpread(df, (s) => rangeUpperTail(q * s, n), -1);
}

/** q with P(Q <= q) = p. */
export function studentisedRangeQuantile(p: number, n: number, df: number): number {
  return solve(p, 1 - p, n, df);
}

/** q with P(Q > q) = alpha, as the tables of the handbooks give it. */
export function studentisedRangeUpperQuantile(alpha: number, n: number, df: number): number {
  return solve(1 - alpha, alpha, n, df);
}

/** In the logarithms of q and of the smaller tail. */
function solve(p: number, upper: number, n: number, df: number): number {
  if (!(n >= 2) || !(df > 0) || !(p >= 0 && p <= 1)) return NaN;
  if (p === 0) return 0;
  if (upper === 0) return Infinity;
  const h =
    p <= upper
      ? (x: number) => Math.log(studentisedRangeCdf(Math.exp(x), n, df) / p)
      : (x: number) => -Math.log(studentisedRangeUpperTail(Math.exp(x), n, df) / upper);
  return Math.exp(risingRoot(h, 1.2, 0.3));
}
