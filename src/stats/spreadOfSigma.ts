import { stirlingRemainder } from './gamma.js';
import { peakedIntegral, peakFrom } from './peakedIntegral.js';

/** ln s - (s^2 - 1) / 2 for s = e^u, without cancellation near s = 1. */
function lnDensity(u: number): number {
  if (Math.abs(u) > 0.2) return u - Math.expm1(2 * u) / 2;
  let sum = 0;
  for (let k = 17; k >= 2; k--) sum = ((1 + sum) * 2 * u) / k; // 2u/2 (1 + 2u/3 (1 + ...))
  return -u * sum;
}

/**
 * Mean of g(s / sigma) over the sample standard deviations s that `df` degrees of freedom give (chi / sqrt(df)), as an
 * integral over ln s.
 * @param g positive and monotone
 * @param direction 1 where g rises with s, -1 where it falls
 */
export function averageOverSpread(df: number, g: (s: number) => number, direction: 1 | -1): number {
  const scale = Math.sqrt(df / Math.PI) * Math.exp(-stirlingRemainder(df / 2));
  const step = Math.min(0.25, 1 / Math.sqrt(2 * df));
  const peak = peakFrom((u) => df * lnDensity(u) + Math.log(g(Math.exp(u))), 0, direction, step / 2);
  return scale * peakedIntegral((u) => Math.exp(df * lnDensity(u)) * g(Math.exp(u)), peak, step);
}
