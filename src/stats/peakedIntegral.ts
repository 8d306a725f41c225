/**
 * Integral over the real line of a positive analytic function with one peak, by the trapezoidal rule, whose error there
 * falls exponentially with the step (Trefethen and Weideman, SIAM Review 56(3), 2014). The sum runs outward from the peak
 * until the terms no longer count; the step is halved until two sums agree so well that the finer is exact in double
 * precision. Every term is positive: small integrals keep their relative precision.
 *
 * @param f never negative
 * @param peak where f is about greatest
 * @param step the first step, about the peak's standard deviation
 */
export function peakedIntegral(f: (x: number) => number, peak: number, step: number): number {
  let h = step;
  let sum = f(peak) + wing(f, peak + h, h) + wing(f, peak - h, -h);
  for (let halving = 0; halving < MOST_HALVINGS; halving++) {
    const between = wing(f, peak + h / 2, h) + wing(f, peak - h / 2, -h);
    const apart = Math.abs(between - sum);
    sum += between;
    h /= 2;
    if (apart <= AGREEMENT * sum) break;
  }
  return sum * h;
}

const AGREEMENT = 4e-9; // the error of the finer sum is about the square of this, or less
const MOST_HALVINGS = 8;
const NEGLIGIBLE = 1e-18;

function wing(f: (x: number) => number, from: number, step: number): number {
  let sum = 0;
  let before = 0;
  for (let x = from; ; x += step) {
    const term = f(x);
    sum += term;
    if (term <= before && term <= NEGLIGIBLE * sum) return sum;
    if (term === 0 && before === 0 && Math.abs(x - from) > 40 * Math.abs(step)) return sum;
    before = term;
  }
}

/**
 * Where a function with one peak is greatest, to within `tolerance`: strides that double until it falls, then the golden
 * section (Kiefer, Proc. AMS 4, 1953).
 * @param lnF logarithm of the function; -Infinity where it vanishes
 * @param direction the side on which the peak lies, or at `start` itself; there may be zeros only on the other side of the peak
 */
export function peakFrom(lnF: (x: number) => number, start: number, direction: 1 | -1, tolerance: number): number {
  let stride = 2 * tolerance;
  let behind = start;
  let here = start;
  let value = lnF(here);
  let ahead = start + direction * stride;
  for (let next = lnF(ahead); next > value || (next === -Infinity && value === -Infinity); next = lnF(ahead)) {
    if (Math.abs(ahead) > FARTHEST) return ahead;
    [behind, here, value] = [here, ahead, next];
    stride *= 2;
    ahead += direction * stride;
  }
  let [low, high] = [behind, ahead];
  let x1 = high - GOLDEN * (high - low);
  let x2 = low + GOLDEN * (high - low);
  let f1 = lnF(x1);
  let f2 = lnF(x2);
  while (Math.abs(high - low) > 2 * tolerance) {
    if (f1 >= f2 && f1 > -Infinity) {
      [high, x2, f2] = [x2, x1, f1];
      x1 = high - GOLDEN * (high - low);
      f1 = lnF(x1);
    } else {
      [low, x1, f1] = [x1, x2, f2];
      x2 = low + GOLDEN * (high - low);
      f2 = lnF(x2);
    }
  }
  return (low + high) / 2;
}

const GOLDEN = 0.6180339887498949;
const FARTHEST = 1e4;
