import { between, upperTail } from '../stats/normal.js';
import { FROZEN, REPEATS, VALUE } from './state.js';

const AT_VALUE = VALUE;
// Doubles: last value; least step seen between unlike readings; steps seen.
const LAST = FROZEN;
const LEAST = FROZEN + 1;
const SEEN = FROZEN + 2;
const STEP = FROZEN + 3; // from the value before to the last unlike one
// Integers: repeats of the last value; repeats at which they are no longer credible.
const REPEATED = REPEATS;
const NEEDED = REPEATS + 1;

const FEWEST = 4; // repeats that are never too few to be chance
const STEPS = 20; // steps between unlike readings after which the least of them stands for the resolution
const MOST = 2 ** 30; // repeats that are counted
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
  s[LAST] = NaN;
  s[LEAST] = Infinity;
  s[SEEN] = 0;
  s[STEP] = NaN;
  c[REPEATED] = 0;
  c[NEEDED] = resolution === null ? NEVER : repeatsNeeded(logChance(resolution, sigma), odds);
}

/** What `repeat` finds: an unlike reading, a credible repeat, or one repeat too many. */
export const UNLIKE = 0;
export const CREDIBLE = 1;
export const TOO_MANY = 2;

/** Takes the reading at hand. */
export function repeat(s: Float64Array, c: Int32Array): number {
  const value = s[AT_VALUE]!;
  const last = s[LAST]!;
  if (value !== last) {
    s[STEP] = value - last;
    s[LAST] = value;
    c[REPEATED] = 0;
    return 0;
  }
  const repeats = c[REPEATED]! + 1;
  if (repeats <= MOST) c[REPEATED] = repeats;
  return repeats >= c[NEEDED]! ? 2 : 1;
}

/** Where the resolution is not known: takes the step to an unlike reading into the guess at it. */
export function measureStep(s: Float64Array, c: Int32Array, sigma: number, odds: number): void {
  const size = Math.abs(s[STEP]!);
  if (!(size > 0)) return; // the first reading has no step
  s[SEEN]!++;
  if (size < s[LEAST]!) s[LEAST] = size;
  else if (s[SEEN] !== STEPS) return;
  const known = smallestStep(s, null);
  if (known !== null) c[NEEDED] = repeatsNeeded(logChance(known, sigma), odds);
}

/** How often the last value has repeated. */
export function repeats(c: Int32Array): number {
  return c[REPEATED]!;
}

/** The step by which repeats are judged; null while it is not known. */
export function smallestStep(s: Float64Array, resolution: number | null): number | null {
  return resolution ?? (s[SEEN]! >= STEPS ? s[LEAST]! : null);
}

/** ln(2 Phi(r / 2 sigma) - 1), without cancellation where that probability is near 0 or near 1. */
export function logChance(resolution: number, sigma: number): number {
  const half = resolution / (2 * sigma);
  return half < 1 ? Math.log(between(-half, half)) : Math.log1p(-2 * upperTail(half));
}

/** Repeats m, at least 4, at which p^m falls below the odds; beyond all counting where every reading repeats. */
export function repeatsNeeded(lnChance: number, odds: number): number {
  if (!(lnChance < 0)) return NEVER;
  return Math.max(FEWEST, Math.min(NEVER, Math.floor(Math.log(odds) / lnChance) + 1));
}
