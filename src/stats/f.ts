import { incompleteBeta } from './gamma.js';

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

/** Bisection in ln x on the smaller tail until two neighbours are left, begun by doubling; slow, never wrong. */
function solve(p: number, q: number, a: number, b: number): number {
  if (!(a > 0) || !(b > 0) || !(p >= 0 && p <= 1)) return NaN;
  if (p === 0) return 0;
  if (q === 0) return Infinity;
  const tooLow = (x: number): boolean => (p <= q ? fCdf(x, a, b) < p : fUpperTail(x, a, b) > q);
  let low = 0;
  let high = 0;
  for (let step = 1; tooLow(Math.exp(high)) && high < 700; step *= 2) high += step;
  for (let step = 1; !tooLow(Math.exp(low)) && low > -700; step *= 2) low -= step;
  for (let i = 0; i < 200; i++) {
    const middle = (low + high) / 2;
    if (middle === low || middle === high) break;
    if (tooLow(Math.exp(middle))) low = middle;
    else high = middle;
  }
  return Math.exp((low + high) / 2);
}
