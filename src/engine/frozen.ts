import { between, upperTail } from '../stats/normal.js';
import { LAST_VALUE, LEAST_STEP, REPEATS, REPEATS_NEEDED, STEP, STEP_BELOW, STEPS_SEEN } from './state.js';

/** Fewer repeats never count as frozen, however unlikely. */
export const FEWEST_REPEATS = 4;

const STEPS = 20; // steps between unlike readings after which the least of them stands for the resolution
const NEVER = 2 ** 31 - 1;

/*
 * Finds a value that has repeated longer than noise and resolution make credible. A reading of the band falls on the same
 * rounded value as the one before with probability at most p = 2 Phi(r / 2 sigma) - 1, the share of the most likely value
 * when the instrument rounds to steps of r; m repeats in a row have at most p^m. A resolution that is not given is judged
 * from the readings: the least step between unlike ones, once 20 steps were seen. It can only be too large, which errs
 * towards silence.
 */

/** Begins to judge by a band. @param resolution null: judged from the readings; @param odds below which repeats count as frozen */
export function layFrozen(s: Float64Array, c: Int32Array, sigma: number, resolution: number | null, odds: number): void {
  s[LAST_VALUE] = NaN;
  s[STEP] = NaN;
  s[STEP_BELOW] = resolution === null ? Infinity : 0;
  s[LEAST_STEP] = Infinity;
  c[STEPS_SEEN] = 0;
  c[REPEATS] = 0;
  c[REPEATS_NEEDED] = resolution === null ? NEVER : repeatsNeeded(logChance(resolution, sigma), odds);
}

/** Where the resolution is not known: takes a step into the guess at it. After the first few only smaller ones are worth it. */
export function measureStep(s: Float64Array, c: Int32Array, sigma: number, odds: number): void {
  s[LEAST_STEP] = Math.min(s[LEAST_STEP]!, s[STEP]!);
  if (++c[STEPS_SEEN]! < STEPS) return;
  s[STEP_BELOW] = s[LEAST_STEP];
  c[REPEATS_NEEDED] = repeatsNeeded(logChance(s[LEAST_STEP], sigma), odds);
}

/** The step by which repeats are judged; null while it is not known. */
export function smallestStep(s: Float64Array, c: Int32Array, resolution: number | null): number | null {
  return resolution ?? (c[STEPS_SEEN]! >= STEPS ? s[LEAST_STEP]! : null);
}

/** ln(2 Phi(r / 2 sigma) - 1), without cancellation where that probability is near 0 or near 1. */
export function logChance(resolution: number, sigma: number): number {
  const half = resolution / (2 * sigma);
  return half < 1 ? Math.log(between(-half, half)) : Math.log1p(-2 * upperTail(half));
}

/** Repeats m, at least 4, at which p^m falls below the odds; beyond all counting where every reading repeats. */
export function repeatsNeeded(lnChance: number, odds: number): number {
  if (!(lnChance < 0)) return NEVER;
  return Math.max(FEWEST_REPEATS, Math.min(NEVER, Math.floor(Math.log(odds) / lnChance) + 1));
}
