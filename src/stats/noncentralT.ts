import { cdf, quantile, upperQuantile, upperTail } from './normal.js';
import { risingRoot } from './root.js';
import { averageOverSpread } from './spreadOfSigma.js';

/**
 * The noncentral t distribution of (Z + delta) / (s / sigma), `df` > 0 degrees of freedom, as in tolerance factors and
 * the power of a t test. From its definition: the normal tail averaged over the sample sigma. NaN outside the domain.
 */

/** P(T > t). */
export function noncentralTUpperTail(t: number, df: number, delta: number): number {
  return tail(t, df, delta, upperTail, 1);
}

/** P(T <= t). */
export function noncentralTCdf(t: number, df: number, delta: number): number {
  return tail(t, df, delta, cdf, -1);
}

function tail(t: number, df: number, delta: number, of: (z: number) => number, falls: 1 | -1): number {
  if (!(df > 0) || !Number.isFinite(delta) || t !== t) return NaN;
  if (df === Infinity) return of(t - delta);
  if (!Number.isFinite(t)) return of(t);
  if (t === 0) return of(-delta);
  return averageOverSpread(df, (s) => of(t * s - delta), t > 0 === (falls === 1) ? -1 : 1);
}

/** t with P(T <= t) = p. */
export function noncentralTQuantile(p: number, df: number, delta: number): number {
  return solve(p, 1 - p, df, delta);
}

/** t with P(T > t) = q. */
export function noncentralTUpperQuantile(q: number, df: number, delta: number): number {
  return solve(1 - q, q, df, delta);
}

/** On the logarithm of the smaller tail. Start: Johnson and Welch, Biometrika 31, 1940. */
function solve(p: number, q: number, df: number, delta: number): number {
  if (!(df > 0) || !Number.isFinite(delta) || !(p >= 0 && p <= 1)) return NaN;
  if (p === 0) return -Infinity;
  if (q === 0) return Infinity;
  const z = p <= q ? quantile(p) : upperQuantile(q);
  const shrink = 1 - (z * z) / (2 * df);
  const guess = shrink > 0.2 ? (delta + z * Math.sqrt(Math.max(0, 1 + (delta * delta - z * z) / (2 * df)))) / shrink : delta + z;
  const h = p <= q ? (t: number) => Math.log(noncentralTCdf(t, df, delta) / p) : (t: number) => -Math.log(noncentralTUpperTail(t, df, delta) / q);
  return risingRoot(h, guess, 0.05 * (1 + Math.abs(guess)));
}
