const EPSILON = 2.220446049250313e-16;
const MOST_STEPS = 200;

/**
 * The root of a rising function: a bracket grown from a guess by doubling strides, then Chandrupatla's method (Advances
 * in Engineering Software 28(3), 1997: bisection, or inverse quadratic interpolation where it is safe).
 * @param h rising; infinite values are allowed
 * @param stride the first stride of the search for a bracket, > 0
 * @returns the root to the last digits, or the end of the search (+-1e300 strides) where h never changes sign
 */
export function risingRoot(h: (x: number) => number, guess: number, stride: number): number {
  let a = guess;
  let fa = h(a);
  if (fa === 0) return a;
  const direction = fa < 0 ? 1 : -1;
  let b = a + direction * stride;
  let fb = h(b);
  for (let far = 2 * stride; fb < 0 === fa < 0 && fb !== 0 && far < 1e300 * stride; far *= 2) {
    [a, fa] = [b, fb];
    b += direction * far;
    fb = h(b);
  }
  return within(h, a, fa, b, fb);
}

function within(h: (x: number) => number, a: number, fa: number, b: number, fb: number): number {
  if (fb === 0 || fb < 0 === fa < 0) return b;
  let c = a;
  let fc = fa;
  let t = 0.5;
  for (let step = 0; step < MOST_STEPS; step++) {
    const x = a + t * (b - a);
    const fx = h(x);
    if (fx < 0 === fa < 0) [c, fc] = [a, fa];
    else [c, b, fc, fb] = [b, a, fb, fa];
    [a, fa] = [x, fx];
    const best = Math.abs(fa) < Math.abs(fb) ? a : b;
    const least = (EPSILON * Math.abs(best) + 1e-300) / Math.abs(b - a);
    if (least > 0.5 || fa === 0) return fa === 0 ? a : best;
    const xi = (a - b) / (c - b);
    const phi = (fa - fb) / (fc - fb);
    const safe = phi * phi < xi && (1 - phi) * (1 - phi) < 1 - xi;
    t = safe ? (fa / (fb - fa)) * (fc / (fb - fc)) + ((c - a) / (b - a)) * (fa / (fc - fa)) * (fb / (fc - fb)) : 0.5;
    if (!(t > least)) t = least;
    else if (t > 1 - least) t = 1 - least;
  }
  return Math.abs(fa) < Math.abs(fb) ? a : b;
}
