/**
 * Pieces that the gamma, beta and t distributions share. Prefactors are scaled by Stirling's remainder (Loader, Fast and
 * accurate computation of binomial probabilities, 2000), so that large arguments cancel nothing.
 */

/** ln(1 + u) - u without cancellation. */
export function log1pMinus(u: number): number {
  if (u < -0.4 || u > 0.6) return Math.log1p(u) - u;
  const r = u / (2 + u);
  const y = r * r;
  let sum = 0;
  for (let k = 29; k >= 3; k -= 2) sum = sum * y + 1 / k;
  return r * (2 * y * sum - u);
}

/** Remainder of Stirling's formula: ln Gamma(a) - (a - 1/2) ln a + a - ln(2 pi) / 2, for a > 0. Abramowitz and Stegun 6.1.41. */
export function stirlingRemainder(a: number): number {
  let shift = 0;
  let x = a;
  while (x < 12) {
    shift += (x + 0.5) * Math.log1p(1 / x) - 1;
    x += 1;
  }
  const w = 1 / (x * x);
  const series =
    1 / 12 - w * (1 / 360 - w * (1 / 1260 - w * (1 / 1680 - w * (1 / 1188 - w * (691 / 360360 - w * (1 / 156 - (w * 3617) / 122400))))));
  return shift + series / x;
}

/** x^a e^-x / Gamma(a), for a, x > 0. */
export function gammaPrefix(a: number, x: number): number {
  const u = (x - a) / a;
  const exponent = u < -0.4 ? Math.log(x / a) - u : log1pMinus(u);
  return Math.exp(a * exponent - stirlingRemainder(a)) * Math.sqrt(a / (2 * Math.PI));
}

const EPSILON = 2.3e-16;
const TINY = 1e-300;

/**
 * Regularised incomplete gamma functions: [P(a, x), Q(a, x)]. Whichever is small keeps its relative precision.
 * Series 6.5.29 and continued fraction 6.5.31 of Abramowitz and Stegun, the latter by Lentz's method.
 */
export function incompleteGamma(a: number, x: number): readonly [lower: number, upper: number] {
  if (!(x > 0)) return [0, 1];
  if (x === Infinity) return [1, 0];
  const prefix = gammaPrefix(a, x);
  if (x < a + 1) {
    let term = 1 / a;
    let sum = term;
    for (let n = 1; term > sum * EPSILON * 0.1; n++) {
      term *= x / (a + n);
      sum += term;
    }
    return [prefix * sum, 1 - prefix * sum];
  }
  let b = x + 1 - a;
  let c = 1 / TINY;
  let d = 1 / b;
  let h = d;
  for (let i = 1; i < 100_000; i++) {
    const an = -i * (i - a);
    b += 2;
    d = 1 / (an * d + b || TINY);
    c = b + an / c || TINY;
    const change = d * c;
    h *= change;
    if (Math.abs(change - 1) < EPSILON) break;
  }
  return [1 - prefix * h, prefix * h];
}

/** x^a y^b / B(a, b) where x + y = 1, both given so that neither is rounded. */
function betaPrefix(a: number, b: number, x: number, y: number): number {
  const s = a + b;
  const d = a * y - b * x;
  const part = (ratio: number, u: number): number => (u < -0.4 ? Math.log(ratio) - u : log1pMinus(u));
  const exponent = a * part((x * s) / a, -d / a) + b * part((y * s) / b, d / b);
  return Math.exp(exponent - stirlingRemainder(a) - stirlingRemainder(b) + stirlingRemainder(s)) * Math.sqrt((a * b) / (2 * Math.PI * s));
}

/** Continued fraction of DiDonato and Morris, ACM TOMS 18(3), 1992, by Lentz's method. */
function betaFraction(a: number, b: number, x: number, y: number): number {
  let f = (a / (a + 1)) * (a * y - b * x + 1) || TINY;
  let c = f;
  let d = 0;
  for (let m = 1; m < 100_000; m++) {
    const k = a + 2 * m - 1;
    const an = ((a + m - 1) * (a + b + m - 1) * m * (b - m) * x * x) / (k * k);
    const bn = m + (m * (b - m) * x) / k + ((a + m) * (a * y - b * x + 1 + m * (1 + y))) / (a + 2 * m + 1);
    d = 1 / (bn + an * d || TINY);
    c = bn + an / c || TINY;
    const change = c * d;
    f *= change;
    if (Math.abs(change - 1) < EPSILON) break;
  }
  return 1 / f;
}

/** Regularised incomplete beta function and its complement, for x + y = 1 both given. Whichever is small is precise. */
export function incompleteBeta(a: number, b: number, x: number, y: number): readonly [lower: number, upper: number] {
  if (!(x > 0)) return [0, 1];
  if (!(y > 0)) return [1, 0];
  if (a * y < b * x) {
    const [upper, lower] = incompleteBeta(b, a, y, x);
    return [lower, upper];
  }
  if ((b * x <= 1 && x <= 0.7) || x < 0.05 * Math.min(1, (a + 1) / b)) {
    let term = 1;
    let sum = 1 / a;
    for (let n = 1; n < 10_000; n++) {
      term *= ((n - b) * x) / n;
      const add = term / (a + n);
      sum += add;
      if (Math.abs(add) < sum * EPSILON * 0.1) break;
    }
    const lower = betaPrefix(a, b, x, y) * Math.exp(-b * Math.log1p(-x)) * sum;
    if (Number.isFinite(lower)) return [lower, 1 - lower];
  }
  const lower = betaPrefix(a, b, x, y) * betaFraction(a, b, x, y);
  return [lower, 1 - lower];
}
