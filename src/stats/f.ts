import { incompleteBeta } from './gamma.js';
import { risingRoot } from './root.js';

/** P(X <= x) for F with `a` and `b` degrees of freedom, both > 0. Abramowitz and Stegun 26.6.2. */
export function fCdf(x: number, a: number, b: number): number {
  return tails(x, a, b)[0];
}

/** P(X > x). */
export function fUpperTail(x: number, a: number, b: number): number {
  return tails(x, a, b)[1];
}

function tails(x: number, a: number, b: number): readonly [number, number] {
  if (!(a > 0) || !(b > 0) || x !== x) return [NaN, NaN];
  if (x <= 0) return [0, 1];
  if (x === Infinity) return [1, 0];
  const sum = a * x + b;
  return incompleteBeta(a / 2, b / 2, (a * x) / sum, b / sum);
}

/** x with P(X <= x) = p. */
export function fQuantile(p: number, a: number, b: number): number {
  return solve(p, 1 - p, a, b);
}

/** x with P(X > x) = q. */
export function fUpperQuantile(q: number, a: number, b: number): number {
  return solve(1 - q, q, a, b);
}

/** In the logarithms of x and of the smaller tail. */
function solve(p: number, q: number, a: number, b: number): number {
  if (!(a > 0) || !(b > 0) || !(p >= 0 && p <= 1)) return NaN;
  if (p === 0) return 0;
  if (q === 0) return Infinity;
  const h = p <= q ? (x: number) => Math.log(fCdf(Math.exp(x), a, b) / p) : (x: number) => -Math.log(fUpperTail(Math.exp(x), a, b) / q);
  return Math.exp(risingRoot(h, 0, Math.min(1, Math.sqrt(2 / a + 2 / b))));
}
