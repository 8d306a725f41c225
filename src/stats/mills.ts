/**
 * The tail of the normal distribution apart from its exponential, and that exponential to the last digit: W. J. Cody,
 * Mathematics of Computation 23 (1969), as in ACM Algorithm 715, up to 5.65 sigma; then the continued fraction 26.2.14 of
 * Abramowitz and Stegun.
 */
export const INV_SQRT_2PI = 0.3989422804014327;
export const NO_DOUBLE = 39; // sigmas beyond which density and tail are below the smallest double

export const CODY_FROM = 0.67;
const CODY_TO = 5.65;
const CODY_ABOVE = [
  0.39894151208813466764, 8.8831497943883759412, 93.506656132177855979, 597.27027639480026226, 2494.5375852903726711, 6848.1904505362823326,
  11602.651437647350124, 9842.7148383839780218,
];
const CODY_LAST = 1.0765576773720192317e-8;
const CODY_BELOW = [
  22.266688044328115691, 235.38790178262499861, 1519.377599407554805, 6485.558298266760755, 18615.571640885098091, 34900.952721145977266,
  38912.003286093271411, 19685.429676859990727,
];

/** exp(-z^2 / 4) twice over, and what is left of exp(-z^2 / 2): z^2 = h^2 + (z - h)(z + h) with h^2 exact. */
export function scaledExponential(z: number, factor: number): number {
  const h = Math.trunc(z * 16) / 16;
  const root = Math.exp((-h * h) / 4);
  return root * Math.exp((-(z - h) * (z + h)) / 2) * factor * root; // rounds once where the result is subnormal
}

/** exp(z^2 / 2) P(Z > z) for z >= 0.67: Cody's rational approximation, beyond 5.65 the continued fraction evaluated backwards. */
export function scaledTail(z: number): number {
  if (z > CODY_TO) return INV_SQRT_2PI * mills(z);
  let above = CODY_LAST * z;
  let below = z;
  for (let i = 0; i < 7; i++) {
    above = (above + CODY_ABOVE[i]!) * z;
    below = (below + CODY_BELOW[i]!) * z;
  }
  return (above + CODY_ABOVE[7]!) / (below + CODY_BELOW[7]!);
}

/** P(Z > z) / pdf(z), for z >= 0.67. */
export function mills(z: number): number {
  if (z <= CODY_TO) return scaledTail(z) / INV_SQRT_2PI;
  let f = z;
  for (let k = z > 10 ? 20 : 45; k >= 1; k--) f = z + k / f;
  return 1 / f;
}
