/*
 * All numbers that a quiet reading touches stand in two arrays, one of doubles and one of integers, and the steps of a
 * channel are functions of the two. A double handed to a call that is not inlined is boxed on the heap, and each further
 * array or object costs a look at its kind and its length: both matter at some ten nanoseconds a reading.
 *
 * Each part has a region of its own. Files on the hot path take these numbers over into constants of their own, since
 * the compiler of today's Node folds a constant of the same file, but loads an imported one at each use.
 */

/** Doubles: the reading at hand. The value; its deviation in sigmas; its time in ms; its index from 0, -1 before the first. */
export const VALUE = 0;
export const Z = 1;
export const TIME = 2;
export const INDEX = 3;
/** Doubles: regions of the parts, and their end, where the readings of the window begin. */
export const CLOCK = 4;
export const LIMITS = 6;
export const LINES = 13;
export const TREND = 16;
export const FROZEN = 17;
export const SUMS = 21;
export const READINGS = 30;

/** Integers: regions of the parts, and their end. */
export const PLACES = 0;
export const RUNS = 6;
export const REPEATS = 17;
export const EVIDENCE = 19;
export const SILENCE = 22;
export const INTEGERS = 23;
