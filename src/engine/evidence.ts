import type { EvidenceReading } from './events.js';
import { EVIDENCE, INDEX, TIME, VALUE } from './state.js';

const AT_TIME = TIME;
const AT_VALUE = VALUE;
const FEWEST = 32; // readings that evidence keeps at least
// Integers: where the ring begins among the doubles, mask of its places, place of the newest reading.
const START = EVIDENCE;
const MASK = EVIDENCE + 1;
const NEWEST = EVIDENCE + 2;

/*
 * Evidence: the newest readings of a channel as they came, with their times, those off the scale too. As many as the
 * longest pattern looks back, so that every verdict recomputes. A ring of times and values by turns.
 */

/** Doubles that the ring takes. @param longest readings that the longest pattern spans */
export function evidenceRoom(longest: number): number {
  return 2 * 2 ** Math.ceil(Math.log2(Math.max(FEWEST, longest))); // a place is then a mask and no division
}

/** Lays out the ring. @param start its first place among the doubles */
export function layEvidence(c: Int32Array, start: number, longest: number): void {
  c[START] = start;
  c[MASK] = evidenceRoom(longest) - 1;
  c[NEWEST] = -2;
}

/** Keeps the reading at hand. */
export function keepEvidence(s: Float64Array, c: Int32Array): void {
  const newest = (c[NEWEST]! + 2) & c[MASK]!;
  const place = c[START]! + newest;
  c[NEWEST] = newest;
  s[place] = s[AT_TIME]!;
  s[place + 1] = s[AT_VALUE]!;
}

/** The newest readings, oldest first. */
export function listEvidence(s: Float64Array, c: Int32Array): EvidenceReading[] {
  const mask = c[MASK]!;
  const held = Math.min(s[INDEX]! + 1, (mask + 1) / 2);
  return Array.from({ length: held }, (_, i) => {
    const age = held - 1 - i;
    const place = c[START]! + ((c[NEWEST]! - 2 * age) & mask);
    return { index: s[INDEX]! - age, time: s[place]!, value: s[place + 1]! };
  });
}
