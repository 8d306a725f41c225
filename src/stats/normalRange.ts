import { cdf, lnBetween, pdf, upperTail } from './normal.js';
import { peakedIntegral, peakFrom } from './peakedIntegral.js';

/**
 * The range of n >= 2 normal readings, in sigmas, from the density of the greatest reading x: the others lie within w
 * below it, or not all of them (Tippett, Biometrika 17, 1925). Both tails are integrals of positive terms.
 */
const firstStep = (n: number): number => (n <= 10 ? 0.5 : 0.35);
const NO_DOUBLE = 80; // sigmas beyond which the upper tail is below the smallest double, for any n

/** P(range <= w). */
export function rangeCdf(w: number, n: number): number {
  if (!(w > 0)) return 0;
  if (w > NO_DOUBLE) return 1;
  const lnOthers = (x: number): number => (n - 1) * lnBetween(x - w, x);
  const peak = peakFrom((x) => (-x * x) / 2 + lnOthers(x), 0, 1, firstStep(n) / 2); // lies in 0..w/2
  return Math.min(1, n * peakedIntegral((x) => pdf(x) * Math.exp(lnOthers(x)), peak, firstStep(n)));
}

/** P(range > w). */
export function rangeUpperTail(w: number, n: number): number {
  if (!(w > 0)) return 1;
  if (w > NO_DOUBLE) return 0;
  const others = (x: number): number => {
    const all = cdf(x);
    if (all === 0) return 0;
    return Math.exp((n - 1) * Math.log1p(-upperTail(x))) * -Math.expm1((n - 1) * Math.log1p(-cdf(x - w) / all));
  };
  const peak = peakFrom((x) => (-x * x) / 2 + Math.log(others(x)), 0, 1, firstStep(n) / 2); // each factor rises at 0
  return Math.min(1, n * peakedIntegral((x) => pdf(x) * others(x), peak, firstStep(n)));
}
