import { incompleteBeta, stirlingRemainder } from './gamma.js';
import { pdf, upperQuantile, upperTail } from './normal.js';

/** Student's t with `df` > 0 degrees of freedom (not only whole ones; Infinity: the normal). NaN outside the domain. */
export function tPdf(t: number, df: number): number {
  if (!(df > 0)) return NaN;
  if (df === Infinity) return pdf(t);
  const exponent =
    ((df + 1) / 2) * -Math.log1p((t * t) / df) + stirlingRemainder((df + 1) / 2) - stirlingRemainder(df / 2) + (df / 2) * Math.log1p(1 / df) - 0.5;
  return Math.exp(exponent) / Math.sqrt(2 * Math.PI);
}

/** P(T > t). Abramowitz and Stegun 26.7.1, through the incomplete beta function. */
export function tUpperTail(t: number, df: number): number {
  if (!(df > 0) || t !== t) return NaN;
  if (df === Infinity) return upperTail(t);
  if (t < 0) return 1 - tUpperTail(-t, df);
  if (t < 1e-160) return 0.5;
  const square = t * t;
  if (square === Infinity) return 0;
  const sum = df + square;
  return incompleteBeta(df / 2, 0.5, df / sum, square / sum)[0] / 2;
}

/** P(T <= t). */
export function tCdf(t: number, df: number): number {
  return tUpperTail(-t, df);
}

/** P(0 < T < t), without cancellation near 0. */
function half(t: number, df: number): number {
  const sum = df + t * t;
  return incompleteBeta(0.5, df / 2, (t * t) / sum, df / sum)[0] / 2;
}

/** t with P(T > t) = q. Start: Cornish-Fisher (26.7.5) or the power law of the tail; then Newton in ln q, ln t. */
export function tUpperQuantile(q: number, df: number): number {
  if (!(df > 0) || !(q >= 0 && q <= 1)) return NaN;
  if (df === Infinity) return upperQuantile(q);
  if (q > 0.5) return -tUpperQuantile(1 - q, df);
  if (q === 0.5) return 0;
  if (q === 0) return Infinity;
  if (q > 0.3) return centralQuantile(0.5 - q, df);
  const z = upperQuantile(q);
  const z2 = z * z;
  let t = z + (z * (z2 + 1)) / (4 * df) + (z * (5 * z2 * z2 + 16 * z2 + 3)) / (96 * df * df);
  if (df < 2 * z2 + 2) {
    const powerLaw = Math.pow((tPdf(0, df) * Math.pow(df, (df + 1) / 2)) / (df * q), 1 / df);
    if (df < 6 || !(t < powerLaw)) t = Math.max(z, powerLaw);
  }
  for (let i = 0; i < 60; i++) {
    const p = tUpperTail(t, df);
    const slope = (-tPdf(t, df) * t) / p; // d ln p / d ln t
    const factor = Math.exp(Math.max(-2, Math.min(2, -Math.log(p / q) / slope)));
    t *= factor;
    if (Math.abs(factor - 1) <= 4e-16) break;
  }
  return t;
}

function centralQuantile(p: number, df: number): number {
  let t = p / tPdf(0, df);
  for (let i = 0; i < 60; i++) {
    const e = (half(t, df) - p) / tPdf(t, df);
    const step = e / (1 + (e * (df + 1) * t) / (df + t * t) / 2);
    t -= step;
    if (Math.abs(step) <= 4e-16 * Math.abs(t)) break;
  }
  return t;
}

/** t with P(T <= t) = p. Far upper tails lose digits in 1 - p: ask `tUpperQuantile` for them. */
export function tQuantile(p: number, df: number): number {
  if (p > 0.3 && p < 0.7 && df > 0 && df < Infinity) return p === 0.5 ? 0 : centralQuantile(p - 0.5, df);
  return -tUpperQuantile(p, df);
}
