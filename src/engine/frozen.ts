import { between, upperTail } from '../stats/normal.js';
import { VALUE } from './hand.js';

const AT_VALUE = VALUE;
const FEWEST = 4; // repeats that are never too few to be chance
const STEPS = 20; // steps between unlike readings after which the least of them stands for the resolution

/**
 * Finds a value that has repeated longer than noise and resolution make credible. A reading of the band falls on the same
 * rounded value as the one before with probability at most p = 2 Phi(r / 2 sigma) - 1, the share of the most likely value
 * when the instrument rounds to steps of r; m repeats in a row have at most p^m.
 */
export class Frozen {
  /** last value, repeats of it, least step seen, steps seen, repeats at which it is no longer credible */
  private readonly state = Float64Array.of(NaN, 0, Infinity, 0, Infinity);
  private sigma = 0;

  /**
   * @param resolution of the instrument; null: the least step between readings stands for it, once 20 steps were seen
   * @param odds below which a run of repeats counts as frozen
   */
  constructor(
    private readonly resolution: number | null,
    private readonly odds: number,
    private readonly hand: Float64Array,
  ) {}

  /** To be called when the band is known. */
  judgeBy(sigma: number): void {
    this.sigma = sigma;
    this.reckon();
  }

  /** Takes the reading at hand. @returns whether its value counts as frozen */
  step(): boolean {
    const { state: s } = this;
    const value = this.hand[AT_VALUE]!;
    const last = s[0]!;
    if (value === last) return ++s[1]! >= s[4]!;
    s[0] = value;
    s[1] = 0;
    if (this.resolution === null) this.measure(value > last ? value - last : last - value);
    return false;
  }

  /** Takes a step between unlike readings into the guess at the resolution. */
  private measure(step: number): void {
    const { state: s } = this;
    if (!(step > 0)) return; // the first reading has none before it
    s[3]!++;
    if (step < s[2]!) s[2] = step;
    else if (s[3] !== STEPS) return;
    this.reckon();
  }

  get repeats(): number {
    return this.state[1]!;
  }

  /** The step by which repeats are judged; null while it is not known. */
  get smallestStep(): number | null {
    if (this.resolution !== null) return this.resolution;
    return this.state[3]! >= STEPS ? this.state[2]! : null;
  }

  /** Natural logarithm of the probability of one repeat; NaN while nothing can be said. */
  get logChance(): number {
    const step = this.smallestStep;
    if (step === null || !(this.sigma > 0)) return NaN;
    return logChance(step, this.sigma);
  }

  private reckon(): void {
    this.state[4] = repeatsNeeded(this.logChance, this.odds);
  }

  arrays(): Readonly<Record<string, Float64Array>> {
    return { frozen: this.state };
  }
}

/** ln(2 Phi(r / 2 sigma) - 1), without cancellation where that probability is near 0 or near 1. */
export function logChance(resolution: number, sigma: number): number {
  const half = resolution / (2 * sigma);
  return half < 1 ? Math.log(between(-half, half)) : Math.log1p(-2 * upperTail(half));
}

/** Repeats m, at least 4, at which p^m falls below the odds; infinite while p is not known, or where every reading repeats. */
export function repeatsNeeded(lnChance: number, odds: number): number {
  if (!(lnChance < 0)) return Infinity;
  return Math.max(FEWEST, Math.floor(Math.log(odds) / lnChance) + 1);
}
