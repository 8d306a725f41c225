import { CODY_FROM, INV_SQRT_2PI, mills, NO_DOUBLE, scaledExponential, scaledTail } from './mills.js';

/**
 * The standard normal distribution, to a few units in the last place over the whole range of doubles, both tails included.
 * Methods: series 26.2.11 and continued fraction 26.2.14 of Abramowitz and Stegun, Handbook of Mathematical Functions
 * (1964); between them a rational Chebyshev approximation of Cody, Mathematics of Computation 23 (1969), as in ACM
 * Algorithm 715; the exponential of the square is split so that no digit is lost far out; quantiles by Halley's
 * iteration on the logarithm of the tail.
 */
const LN_SQRT_2PI = 0.9189385332046727;

/** Density at z. */
export function pdf(z: number): number {
  return scaledExponential(Math.min(Math.abs(z), NO_DOUBLE), INV_SQRT_2PI);
}

/** cdf(z) - 1/2, by the series; for |z| below about 3. */
function central(z: number): number {
  const square = z * z;
  let term = z;
  let sum = z;
  for (let k = 3; Math.abs(term) > 1e-17 * Math.abs(sum); k += 2) {
    term *= square / k;
    sum += term;
  }
  return pdf(z) * sum;
}

/** P(Z > z). Full relative precision however small, down to the smallest double. */
export function upperTail(z: number): number {
  if (z !== z) return NaN;
  if (z >= CODY_FROM) return z > NO_DOUBLE ? 0 : scaledExponential(z, scaledTail(z));
  if (z <= -CODY_FROM) return 1 - upperTail(-z);
  return 0.5 - central(z);
}

/** P(Z <= z). */
export function cdf(z: number): number {
  return upperTail(-z);
}

/** P(|Z| >= |z|): the odds of a reading at least so far out when nothing has changed. */
export function twoSided(z: number): number {
  const a = Math.abs(z);
  return a < 0.5 ? 1 - 2 * central(a) : 2 * upperTail(a);
}

/** Natural logarithm of P(Z > z), also where that probability is below the smallest double. */
export function logUpperTail(z: number): number {
  if (z > 30) return (-z * z) / 2 - LN_SQRT_2PI + Math.log(mills(z));
  return z > -2 ? Math.log(upperTail(z)) : Math.log1p(-upperTail(-z));
}

/** P(a < Z < b) without cancellation; 0 where a >= b. */
export function between(a: number, b: number): number {
  if (!(a < b)) return a !== a || b !== b ? NaN : 0;
  const width = b - a;
  const nearest = a > 0 ? a : b < 0 ? -b : 0;
  if (width * (1 + nearest) < 0.1) return narrow(a, b);
  if (a > -1 && b < 1) return central(b) - central(a);
  if (a >= 0) return upperTail(a) - upperTail(b);
  if (b <= 0) return cdf(b) - cdf(a);
  return 1 - cdf(a) - upperTail(b);
}

/** ln P(a < Z < b), precise also where nearly all readings lie between. */
export function lnBetween(a: number, b: number): number {
  const outside = cdf(a) + upperTail(b);
  return outside < 0.5 ? Math.log1p(-outside) : Math.log(between(a, b));
}

/** P(a < Z < b) for short intervals: Taylor's series about the midpoint, whose odd terms vanish; Hermite polynomials He2 to He8. */
function narrow(a: number, b: number): number {
  const half = (b - a) / 2;
  const m = a + half;
  const s = m * m;
  const h2 = half * half;
  const he4 = s * s - 6 * s + 3;
  const he6 = s * s * s - 15 * s * s + 45 * s - 15;
  const he8 = s * s * s * s - 28 * s * s * s + 210 * s * s - 420 * s + 105;
  const series = 1 + (h2 / 6) * (s - 1 + (h2 / 20) * (he4 + (h2 / 42) * (he6 + (h2 / 72) * he8)));
  return 2 * half * pdf(m) * series;
}

/**
 * z with P(Z > z) = q, for q from the smallest double to 1. NaN outside [0, 1]; infinite at 0 and 1.
 * Start: 26.2.23 of Abramowitz and Stegun.
 */
export function upperQuantile(q: number): number {
  if (!(q >= 0 && q <= 1)) return NaN;
  if (q === 0) return Infinity;
  if (q === 1) return -Infinity;
  if (q > 0.5) return -upperQuantile(1 - q);
  if (q > 0.4) return offCentre(0.5 - q);
  const t = Math.sqrt(-2 * Math.log(q));
  let z = t - (2.515517 + t * (0.802853 + t * 0.010328)) / (1 + t * (1.432788 + t * (0.189269 + t * 0.001308)));
  for (let i = 0; i < 4; i++) {
    const ratio = z >= CODY_FROM ? mills(z) : upperTail(z) / pdf(z);
    const gap = z < 37 ? Math.log(upperTail(z) / q) : logUpperTail(z) - Math.log(q);
    const step = -gap * ratio; // Newton's step in ln q, then the second-order term
    const z1 = step * (1 + (step * (z - 1 / ratio)) / 2);
    z -= z1;
    if (Math.abs(z1) < 1e-15 * z) break;
  }
  return z;
}

/** z with P(-z < Z < z) = p, for p from the smallest double to 1, without rounding a half on the way. */
export function centralQuantile(p: number): number {
  return p >= 0 && p < 0.2 ? offCentre(p / 2) : upperQuantile((1 - p) / 2);
}

/** z with cdf(z) - 1/2 = p, |p| < 0.1. */
function offCentre(p: number): number {
  let z = p / INV_SQRT_2PI;
  for (let i = 0; i < 5; i++) {
    const e = (central(z) - p) / pdf(z);
    z -= e / (1 + (e * z) / 2);
  }
  return z;
}

/** z with P(Z <= z) = p. Far upper tails lose digits in 1 - p: ask `upperQuantile` for them. */
export function quantile(p: number): number {
  return p > 0.4 && p < 0.6 ? offCentre(p - 0.5) : -upperQuantile(p);
}
