import type { EvidenceReading } from './events.js';
import { EVIDENCE, EVIDENCE_MASK, EVIDENCE_NEWEST, INDEX } from './state.js';

const FEWEST = 32; // readings that evidence keeps at least

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
  c[EVIDENCE] = start;
  c[EVIDENCE_MASK] = evidenceRoom(longest) - 1;
  c[EVIDENCE_NEWEST] = -2;
}

/** The newest readings, oldest first. */
export function listEvidence(s: Float64Array, c: Int32Array): EvidenceReading[] {
  const mask = c[EVIDENCE_MASK]!;
  const held = Math.min(s[INDEX]! + 1, (mask + 1) / 2);
  return Array.from({ length: held }, (_, i) => {
    const age = held - 1 - i;
    const place = c[EVIDENCE]! + ((c[EVIDENCE_NEWEST]! - 2 * age) & mask);
    return { index: s[INDEX]! - age, time: s[place]!, value: s[place + 1]! };
  });
}
