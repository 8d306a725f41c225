import type { EvidenceReading } from './events.js';
import { EVIDENCE, EVIDENCE_MASK, EVIDENCE_NEWEST, INDEX, TIME, VALUE } from './state.js';

const FEWEST = 32; // readings that evidence keeps at least

/*
 * Evidence: the newest readings that took part (those off the scale take part in nothing), as many as the longest pattern
 * looks back, so that every verdict recomputes. Three rings one after the other among the doubles: of times, of values,
 * of indices. The quiet path fills them.
 */

const kept = (longest: number): number => 2 ** Math.ceil(Math.log2(Math.max(FEWEST, longest))); // a place is then a mask and no division

/** Doubles that the rings take. @param longest readings that the longest pattern spans */
export function evidenceRoom(longest: number): number {
  return 3 * kept(longest);
}

/** Lays out the rings. @param start their first place among the doubles */
export function layEvidence(s: Float64Array, c: Int32Array, start: number, longest: number): void {
  s.fill(NaN, start, start + evidenceRoom(longest));
  c[EVIDENCE] = start;
  c[EVIDENCE_MASK] = kept(longest) - 1;
  c[EVIDENCE_NEWEST] = -1;
}

/** The newest readings that took part, oldest first, and the one at hand in any case if `hand` asks for it. */
export function listEvidence(s: Float64Array, c: Int32Array, hand: boolean): EvidenceReading[] {
  const room = c[EVIDENCE_MASK]! + 1;
  const readings: EvidenceReading[] = [];
  for (let age = room - 1; age >= 0; age--) {
    const place = c[EVIDENCE]! + ((c[EVIDENCE_NEWEST]! - age) & c[EVIDENCE_MASK]!);
    const index = s[place + 2 * room]!;
    if (index >= 0) readings.push({ index, time: s[place]!, value: s[place + room]! });
  }
  if (hand && readings.at(-1)?.index !== s[INDEX]) readings.push({ index: s[INDEX]!, time: s[TIME]!, value: s[VALUE]! });
  return readings;
}
