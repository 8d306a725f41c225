import { c4 } from '../stats/constants.js';
import { tUpperQuantile } from '../stats/student.js';
import { upperTail } from '../stats/normal.js';
import type { Band } from './band.js';

/**
 * The first readings of a channel that is settling: mean and standard deviation in one pass (Welford, Technometrics 4(3),
 * 1962) of deviations from the first reading, so that a large offset costs no digits.
 */
export class Baseline {
  /** taken, first reading, mean deviation from it, sum of squared deviations from the mean. */
  private readonly state = new Float64Array(4);

  /** @param needed readings to take, at least 2 */
  constructor(readonly needed: number) {}

  get taken(): number {
    return this.state[0]!;
  }

  /** @returns whether the baseline is complete */
  take(value: number): boolean {
    const s = this.state;
    if (s[0] === 0) s[1] = value;
    const n = ++s[0]!;
    const x = value - s[1]!;
    const d = x - s[2]!;
    s[2]! += d / n;
    s[3]! += d * (x - s[2]!);
    return n >= this.needed;
  }

  restart(): void {
    this.state.fill(0);
  }

  /**
   * The band of the readings taken: centre = mean, sigma = s / c4(n), with their standard uncertainties s / sqrt(n) and
   * sigma sqrt(1 - c4^2) / c4 (ASTM E2587; GUM 4.2).
   * @param resolution a spread of zero becomes resolution / sqrt(12), the spread that rounding alone leaves
   * @returns null where the readings have no spread and no resolution is known
   */
  band(id: string, k: number, resolution: number | null): Band | null {
    const [n, first, offset, m2] = this.state as unknown as [number, number, number, number];
    const correction = c4(n);
    const sd = Math.sqrt(m2 / (n - 1));
    const sigma = sd > 0 ? sd / correction : (resolution ?? 0) / Math.sqrt(12);
    if (!(sigma > 0)) return null;
    const centre = first + offset;
    return {
      id,
      origin: 'learned',
      centre,
      sigma,
      n,
      centreUncertainty: (sd > 0 ? sd : sigma) / Math.sqrt(n),
      sigmaUncertainty: (sigma * Math.sqrt(1 - correction * correction)) / correction,
      k,
      low: centre - k * sigma,
      high: centre + k * sigma,
    };
  }

  arrays(): Readonly<Record<string, Float64Array>> {
    return { baseline: this.state };
  }
}

/**
 * Limit in sigmas for the `inconsistent` detector: a further reading lies outside centre +- limit * sigma as seldom as a
 * normal reading lies beyond k sigmas, the uncertainty of a centre and sigma from n readings counted in. The prediction
 * interval xbar +- t s sqrt(1 + 1/n) of any handbook (Hahn and Meeker, Statistical Intervals, 1991); k itself where n is
 * not known.
 */
export function predictionLimit({ n, k }: Pick<Band, 'n' | 'k'>): number {
  if (n === null || n < 2) return k;
  return tUpperQuantile(upperTail(k), n - 1) * c4(n) * Math.sqrt(1 + 1 / n); // sigma here is s / c4
}
