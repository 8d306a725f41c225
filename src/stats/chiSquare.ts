import { gammaPrefix, incompleteGamma, stirlingRemainder } from './gamma.js';
import { upperQuantile } from './normal.js';

/** P(X <= x) for chi-square with `df` > 0 degrees of freedom. */
export function chiSquareCdf(x: number, df: number): number {
  return df > 0 && x === x ? incompleteGamma(df / 2, x / 2)[0] : NaN;
}

/** P(X > x). */
export function chiSquareUpperTail(x: number, df: number): number {
  return df > 0 && x === x ? incompleteGamma(df / 2, x / 2)[1] : NaN;
}

/** x with P(X <= x) = p. */
export function chiSquareQuantile(p: number, df: number): number {
  return solve(p, 1 - p, df);
}

/** x with P(X > x) = q. */
export function chiSquareUpperQuantile(q: number, df: number): number {
  return solve(1 - q, q, df);
}

/**
 * Start: Wilson and Hilferty 1931, or the leading term of the lower tail; then Newton in the logarithms of the smaller
 * tail and of x.
 */
function solve(p: number, q: number, df: number): number {
  if (!(df > 0) || !(p >= 0 && p <= 1)) return NaN;
  if (p === 0) return 0;
  if (q === 0) return Infinity;
  const a = df / 2;
  const low = p <= q;
  const goal = low ? p : q;
  const z = low ? -upperQuantile(p) : upperQuantile(q);
  const cube = 1 - 2 / (9 * df) + z * Math.sqrt(2 / (9 * df));
  let x = df * cube * cube * cube;
  if (low && (cube < 0.3 || df < 3)) {
    const lnGamma = stirlingRemainder(a) + (a - 0.5) * Math.log(a) - a + Math.log(2 * Math.PI) / 2;
    x = 2 * Math.exp((Math.log(p) + lnGamma + Math.log(a)) / a);
    if (x > df) x = df * 0.9;
  }
  for (let i = 0; i < 100; i++) {
    const [lower, upper] = incompleteGamma(a, x / 2);
    const tail = low ? lower : upper;
    const density = gammaPrefix(a, x / 2) / x;
    if (!(tail > 0) || !(density > 0)) {
      x = low ? x * 2 : df + (x - df) * 0.7; // the start fell off the end of the doubles
      continue;
    }
    const slope = ((low ? 1 : -1) * density * x) / tail;
    const step = Math.max(-1.5, Math.min(1.5, Math.log(tail / goal) / slope));
    x *= Math.exp(-step);
    if (Math.abs(step) < 3e-16 || (i > 8 && Math.abs(step) < 1e-14)) break;
  }
  return x;
}
