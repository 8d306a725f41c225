import { stirlingRemainder } from './gamma.js';
import { between, cdf, pdf, upperTail } from './normal.js';
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

/** d2(n): the mean range of n normal readings, in sigmas (Tippett 1925). For whole n >= 2; NaN otherwise. */
export function d2(n: number): number {
  if (!(n >= 2)) return NaN;
  return 2 * integrate((x) => 1 - Math.pow(cdf(x), n) - Math.pow(upperTail(x), n), 0, 12, 12);
}

/** d3(n): the standard deviation of the range of n normal readings, in sigmas, from the density of the range. */
export function d3(n: number): number {
  if (!(n >= 2)) return NaN;
  const mean = d2(n);
  // variance as the integral of (w - mean)^2 times the density n(n-1) integral of pdf(x) pdf(x+w) between(x,x+w)^(n-2)
  const density = (w: number): number =>
    n * (n - 1) * integrate((x) => pdf(x) * pdf(x + w) * Math.pow(between(x, x + w), n - 2), -9 - w / 2, 9 - w / 2, 6);
  return Math.sqrt(integrate((w) => (w - mean) ** 2 * density(w), 0, 16, 8));
}
