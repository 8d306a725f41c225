import { BINS, COUNT_FULL, PER_SIGMA, REACH } from './histogram.js';
import { RULE_BIT, RULES } from './rules.js';
import * as state from './state.js';
import * as zones from './zoneRules.js';

// Constants of this file, see state.ts.
const { VALUE, Z, TIME, INDEX, LAST_TIME, RANGE_LOW, RANGE_HIGH, TOLERANCE_LOW, TOLERANCE_HIGH, CENTRE, SIGMA, PREDICTION } = state;
const { EVIDENCE, EVIDENCE_MASK, EVIDENCE_NEWEST } = state;
const { READINGS, NEXT, BLOCK_END, FULL, COUNT, SCALE, ANCHOR, FLOOR, S1, S2, SUM, LOST } = state;
const { FRESH_S1, FRESH_S2, FRESH_SUM, FRESH_LOST, FRESH_LEAST, FRESH_MOST } = state;
const { LINE1, LINE2, LINE3, RECENT, ABOVE, BELOW, SIDE_RUN, ENABLED } = state;
const { HAS_BAND, WATCHES_REPEATS, LAST_VALUE, STEP, STEP_BELOW, REPEATS, REPEATS_NEEDED } = state;
const { TWO, ONE, SIDE_BITS, KEEP, HOLDS } = zones;
const [LAST_BIN, FULL_BIN, BINS_PER_SIGMA, FARTHEST] = [BINS - 1, COUNT_FULL, PER_SIGMA, REACH];
const INCONSISTENT = RULE_BIT.inconsistent;
const EIGHT = RULES.indexOf('eight-one-side');
const LONGEST = 30; // a run of 2^30 readings grows no further

/** What `quietPath` found beyond the bits of the rules. */
export const FROZEN_BIT = 1 << RULES.length;
export const OUTSIDE_BIT = FROZEN_BIT << 1;
export const OFF_SCALE_BIT = FROZEN_BIT << 2;
export const SETTLING_BIT = FROZEN_BIT << 3;
export const BLOCK_BIT = FROZEN_BIT << 4;
export const STEP_BIT = FROZEN_BIT << 5;

const FROZEN = FROZEN_BIT;
const OUTSIDE = OUTSIDE_BIT;
const OFF_SCALE = OFF_SCALE_BIT;
const SETTLING = SETTLING_BIT;
const BLOCK = BLOCK_BIT;
const SMALL_STEP = STEP_BIT;

/**
 * Takes the reading at hand through everything that a quiet reading meets, and says what was not quiet about it. One
 * function over two arrays, since it runs at every reading: no calls, and no branches on what is noise (a comparison
 * that noise decides anew each time, and no processor foresees, becomes a bit).
 * @param s the doubles of the channel, c its integers: see state.ts
 * @returns 0, or the bits of the rules that signal, and FROZEN, OUTSIDE (the tolerance), OFF_SCALE, SETTLING (there is no
 *   band: the reading has not been judged), BLOCK (the window must be attended to), SMALL_STEP (it may tell the resolution)
 */
export function quietPath(s: Float64Array, c: Int32Array, histogram: Uint32Array): number {
  const value = s[VALUE]!;
  const time = s[TIME]!;
  const index = s[INDEX]! + 1;
  s[INDEX] = index;
  const newest = s[LAST_TIME]!;
  if (time > newest || newest !== newest) s[LAST_TIME] = time;

  // A reading that measures nothing takes part in no statistics, as a missing reading takes part in none.
  if (!(value >= s[RANGE_LOW]! && value <= s[RANGE_HIGH]!)) return OFF_SCALE;
  let found = value > s[TOLERANCE_HIGH]! || value < s[TOLERANCE_LOW]! ? OUTSIDE : 0;

  // Evidence: see evidence.ts.
  const turn = (c[EVIDENCE_NEWEST]! + 1) & c[EVIDENCE_MASK]!;
  const room = c[EVIDENCE_MASK]! + 1;
  const place = c[EVIDENCE]! + turn;
  c[EVIDENCE_NEWEST] = turn;
  s[place] = time;
  s[place + room] = value;
  s[place + room + room] = index;

  // The rolling window: see rollingWindow.ts. Sums are compensated by two-sum (Knuth, The Art of Computer Programming 2, 4.2.2).
  const at = c[NEXT]!;
  const next = at + 1;
  const anchor = s[ANCHOR]!;
  const d = value - anchor;
  let s1 = s[S1]! + d;
  let s2 = s[S2]! + d * d;
  const before = s[SUM]!;
  let sum = before + value;
  let part = sum - before;
  let lost = s[LOST]! + (before - (sum - part) + (value - part));
  if (c[FULL] === 0) {
    s[COUNT] = next;
    s[SCALE] = 1 / (next * at);
  } else {
    const oldest = s[READINGS + at]!;
    const gone = oldest - anchor;
    s1 -= gone;
    s2 -= gone * gone;
    const rest = sum - oldest;
    part = rest - sum;
    lost += sum - (rest - part) - (oldest + part);
    sum = rest;
  }
  s[READINGS + at] = value;
  s[S1] = s1;
  s[S2] = s2;
  s[SUM] = sum;
  s[LOST] = lost;
  s[FRESH_S1]! += d;
  s[FRESH_S2]! += d * d;
  const fresh = s[FRESH_SUM]!;
  const total = fresh + value;
  part = total - fresh;
  s[FRESH_SUM] = total;
  s[FRESH_LOST]! += fresh - (total - part) + (value - part);
  if (value < s[FRESH_LEAST]!) s[FRESH_LEAST] = value;
  if (value > s[FRESH_MOST]!) s[FRESH_MOST] = value;
  c[NEXT] = next;
  if (next === c[BLOCK_END] || !(s2 >= s[FLOOR]!)) found |= BLOCK;
  if (c[HAS_BAND] === 0) return found | SETTLING;

  const z = (value - s[CENTRE]!) / s[SIGMA]!;
  s[Z] = z;
  const far = Math.abs(z);
  const bin = far <= FARTHEST ? ((z + FARTHEST) * BINS_PER_SIGMA + 1) | 0 : z > 0 ? LAST_BIN : 0;
  const count = histogram[bin]!;
  if (count < FULL_BIN) histogram[bin] = count + 1;

  // The zone rules. A value exactly on a line is not beyond it, exactly on the centre it is on neither side.
  const high = 0 - +(z > 0); // all bits, or none
  const low = 0 - +(z < 0);
  const above = (c[ABOVE]! + 1 - (c[ABOVE]! >> LONGEST)) & high;
  const below = (c[BELOW]! + 1 - (c[BELOW]! >> LONGEST)) & low;
  c[ABOVE] = above;
  c[BELOW] = below;
  found |= (+((above | below) >= c[SIDE_RUN]!) << EIGHT) & c[ENABLED]!; // one of the runs is 0
  let recent = (c[RECENT]! << 1) & KEEP;
  if ((recent | +(far > s[LINE1]!)) !== 0) {
    const beyond = (+(far > s[LINE1]!) << ONE) | (+(far > s[LINE2]!) << TWO);
    recent |= (beyond & high) | ((beyond & low) << SIDE_BITS);
    found |= (+(far > s[LINE3]!) | HOLDS[recent & 0xff]! | HOLDS[recent >> SIDE_BITS]!) & c[ENABLED]!;
    if (far > s[PREDICTION]!) found |= INCONSISTENT; // it lies beyond the lines
  }
  c[RECENT] = recent;

  // Frozen: see frozen.ts.
  if (c[WATCHES_REPEATS] !== 0) {
    const step = Math.abs(value - s[LAST_VALUE]!);
    s[STEP] = step;
    s[LAST_VALUE] = value;
    if (step === 0) {
      const repeats = c[REPEATS]! + 1 - (c[REPEATS]! >> LONGEST);
      c[REPEATS] = repeats;
      if (repeats >= c[REPEATS_NEEDED]!) found |= FROZEN;
    } else {
      c[REPEATS] = 0;
      if (step < s[STEP_BELOW]!) found |= SMALL_STEP;
    }
  }
  return found;
}
