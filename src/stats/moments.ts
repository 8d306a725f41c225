/**
 * Mean, standard deviation and lag-1 autocorrelation of a series, to the last digits also where the spread is a billionth
 * of the mean: sums carry their rounding errors along (Neumaier, ZAMM 54, 1974), and the mean carries a second word.
 */
export interface Moments {
  readonly n: number;
  /** NaN for an empty series. */
  readonly mean: number;
  /** Sample standard deviation (divisor n - 1); NaN for fewer than two values. */
  readonly sd: number;
  /**
   * Sum of (x[i] - mean)(x[i+1] - mean) over the sum of (x[i] - mean)^2, as NIST StRD defines it; NaN for fewer than two
   * values or no spread.
   */
  readonly lag1: number;
}

/** @param values finite, any length; not changed */
export function moments(values: ArrayLike<number>): Moments {
  const n = values.length;
  const sum = new CompensatedSum();
  for (let i = 0; i < n; i++) sum.add(values[i]!);
  const mean = sum.value() / n;
  const rest = new CompensatedSum();
  for (let i = 0; i < n; i++) rest.addDifference(values[i]!, mean);
  const correction = rest.value() / n; // exact mean - rounded mean
  const squares = new CompensatedSum();
  const products = new CompensatedSum();
  let before = 0;
  for (let i = 0; i < n; i++) {
    const deviation = deviationFrom(mean, correction, values[i]!);
    squares.add(deviation * deviation);
    if (i > 0) products.add(before * deviation);
    before = deviation;
  }
  const spread = squares.value();
  return { n, mean: mean + correction, sd: n < 2 ? NaN : Math.sqrt(spread / (n - 1)), lag1: n < 2 ? NaN : products.value() / spread };
}

/** x - (mean + correction), with the rounding error of the first difference. */
function deviationFrom(mean: number, correction: number, x: number): number {
  const difference = x - mean;
  const back = difference - x;
  return difference + (x - (difference - back) - (mean + back) - correction);
}

/** A sum that carries the rounding errors of its additions. */
class CompensatedSum {
  private sum = 0;
  private lost = 0;

  add(term: number): void {
    const total = this.sum + term;
    this.lost += Math.abs(this.sum) >= Math.abs(term) ? this.sum - total + term : term - total + this.sum;
    this.sum = total;
  }

  /** Adds a - b with the rounding error of that difference. */
  addDifference(a: number, b: number): void {
    const difference = a - b;
    const back = difference - a;
    this.add(difference);
    this.lost += a - (difference - back) - (b + back);
  }

  value(): number {
    return this.sum + this.lost;
  }
}
