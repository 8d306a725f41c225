/*
 * Layout of a channel's state. All numbers that a quiet reading touches stand in two arrays, one of doubles and one of
 * integers: a number handed to a call may be boxed on the heap, and each further array or object costs a look at its kind
 * and its length, which counts at some ten nanoseconds a reading.
 *
 * Code that runs at each reading takes these numbers over into constants of its own file, since the compiler of today's
 * Node folds those, but loads an imported one at each use.
 */

// Doubles.
/** The reading at hand: value, deviation in sigmas, time in ms, index counted from 0 (-1 before the first). */
export const VALUE = 0;
export const Z = 1;
export const TIME = 2;
export const INDEX = 3;
/** Newest time of any reading; first tick, for a channel of which nothing ever came. */
export const LAST_TIME = 4;
export const WATCH_BEGAN = 5;
/** What the instrument may report, and what the work may be. */
export const RANGE_LOW = 6;
export const RANGE_HIGH = 7;
export const TOLERANCE_LOW = 8;
export const TOLERANCE_HIGH = 9;
/** The band, and the limit of `inconsistent` in its sigmas. */
export const CENTRE = 10;
export const SIGMA = 11;
export const PREDICTION = 12;
/** Lines of the zones in sigmas. */
export const LINE1 = 13;
export const LINE2 = 14;
export const LINE3 = 15;
/** Supplementary rules: the value before. */
export const BEFORE = 16;
/** Frozen: last value; size of the step to it; size below which a step is worth a look; least step seen between unlike readings. */
export const LAST_VALUE = 17;
export const STEP = 18;
export const STEP_BELOW = 19;
export const LEAST_STEP = 20;
/** Window: sums of deviations from the anchor and of their squares; of the readings, and what that lost in rounding; the anchor; what the squares may fall to. */
export const S1 = 21;
export const S2 = 22;
export const SUM = 23;
export const LOST = 24;
export const ANCHOR = 25;
export const FLOOR = 26;
/** Window: the same sums and the extremes of the fresh readings, those of the block being written. */
export const FRESH_S1 = 27;
export const FRESH_S2 = 28;
export const FRESH_SUM = 29;
export const FRESH_LOST = 30;
export const FRESH_LEAST = 31;
export const FRESH_MOST = 32;
/** Window: readings held, n, and 1 / n(n - 1). */
export const COUNT = 33;
export const SCALE = 34;
/** Window: its readings; the rings of the evidence begin after them. */
export const READINGS = 35;

// Integers.
/** Window: where the next reading goes, where the block began and ends, its number; 1 once the ring is full; 1 while the old block holds an extreme. */
export const NEXT = 0;
export const BLOCK_BEGIN = 1;
export const BLOCK_END = 2;
export const BLOCK = 3;
export const FULL = 4;
export const OLD_EXTREME = 5;
/** Zone rules: which of the newest readings lay beyond a line (see zoneRules.ts); readings in a row on one side; length of run asked for; rules that are on. */
export const RECENT = 6;
export const ABOVE = 7;
export const BELOW = 8;
export const SIDE_RUN = 9;
export const ENABLED = 10;
/** Supplementary rules: readings in a row rising (positive) or falling (negative), alternating, within one sigma, outside it; 1 once there is a reading before. */
export const TREND = 11;
export const ZIGZAG = 12;
export const WITHIN = 13;
export const OUTSIDE = 14;
export const SEEN = 15;
/** Frozen: whether it is watched; repeats of the last value, and at how many they are no longer credible; steps that were looked at. */
export const WATCHES_REPEATS = 16;
export const REPEATS = 17;
export const REPEATS_NEEDED = 18;
export const STEPS_SEEN = 24;
/** Evidence: first place of its rings among the doubles; mask of places; place of the newest. */
export const EVIDENCE = 19;
export const EVIDENCE_MASK = 20;
export const EVIDENCE_NEWEST = 21;
/** 1 while there is a band. */
export const HAS_BAND = 22;
/** 1 while a silence has been signalled and no reading came since. */
export const SILENT = 23;
export const INTEGERS = 25;
