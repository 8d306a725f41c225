import { stirlingRemainder } from './gamma.js';
import { lnBetween, upperTail } from './normal.js';
import { peakedIntegral } from './peakedIntegral.js';
import { integrate } from './quadrature.js';

/**
 * c4(n): the mean of the sample standard deviation of n normal readings, in sigmas. For any n >= 2; NaN below.
 * sqrt(2 / (n - 1)) Gamma(n / 2) / Gamma((n - 1) / 2), as in ASTM E2587; by Stirling's remainder.
 */
export function c4(n: number): number {
  if (!(n >= 2)) return NaN;
  const a = n / 2;
  const b = (n - 1) / 2;
  // ln Gamma(a) - ln Gamma(b) - ln(b) / 2, with ln(a / b) = log1p(1 / (n - 1)); no two large terms cancel
  const exponent = (a - 0.5) * Math.log1p(1 / (n - 1)) - 0.5 + stirlingRemainder(a) - stirlingRemainder(b);
  return Math.exp(exponent);
}

/** d2(n): the mean range of n normal readings, in sigmas (Tippett, Biometrika 17, 1925). For n >= 2; NaN below. */
export function d2(n: number): number {
  if (!(n >= 2)) return NaN;
  return 2 * integrate((x) => -Math.expm1(n * Math.log1p(-upperTail(x))) - Math.pow(upperTail(x), n), 0, 14, 20);
}

/** d3(n): the standard deviation of the range of n normal readings, in sigmas, from the density of the range. For n >= 2; NaN below. */
export function d3(n: number): number {
  if (!(n >= 2)) return NaN;
  const mean = d2(n);
  const variance = integrate((w) => (w - mean) ** 2 * rangeDensity(w, n), 0, mean + 13, Math.ceil(mean + 13));
  return Math.sqrt(variance);
}

/** n (n - 1) times the integral of pdf(m - w/2) pdf(m + w/2) P(m - w/2 < Z < m + w/2)^(n - 2) over the midpoint m. */
function rangeDensity(w: number, n: number): number {
  const others = (m: number): number => Math.exp(-m * m + (n - 2) * lnBetween(m - w / 2, m + w / 2));
  return ((n * (n - 1)) / (2 * Math.PI)) * Math.exp((-w * w) / 4) * peakedIntegral(others, 0, 0.5);
}
