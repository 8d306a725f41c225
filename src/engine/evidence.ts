import type { EvidenceReading } from './events.js';
import { INDEX, TIME, VALUE } from './hand.js';

const AT_TIME = TIME;
const AT_VALUE = VALUE;
const FEWEST = 32; // readings that evidence keeps at least

/**
 * The newest readings of a channel as they came, with their times; those off the scale too. As many as the longest
 * pattern looks back, so that every verdict recomputes.
 */
export class EvidenceRing {
  /** time and value by turns */
  private readonly ring: Float64Array;
  /** place of the newest reading */
  private readonly place = Int32Array.of(-2);
  private readonly mask: number;

  /** @param longest readings that the longest pattern spans */
  constructor(
    private readonly hand: Float64Array,
    longest: number,
  ) {
    const kept = 2 ** Math.ceil(Math.log2(Math.max(FEWEST, longest))); // a place is then a mask and no division
    this.ring = new Float64Array(2 * kept);
    this.mask = 2 * kept - 1;
  }

  /** Keeps the reading at hand. */
  push(): void {
    const { hand, ring, place } = this;
    const at = (place[0]! + 2) & this.mask;
    place[0] = at;
    ring[at] = hand[AT_TIME]!;
    ring[at + 1] = hand[AT_VALUE]!;
  }

  /** The newest readings, oldest first. */
  list(): EvidenceReading[] {
    const { ring, mask, place, hand } = this;
    const newest = hand[INDEX]!;
    const held = Math.min(newest + 1, ring.length / 2);
    return Array.from({ length: held }, (_, i) => {
      const at = (place[0]! - 2 * (held - 1 - i)) & mask;
      return { index: newest - (held - 1 - i), time: ring[at]!, value: ring[at + 1]! };
    });
  }

  arrays(): Readonly<Record<string, Float64Array | Int32Array>> {
    return { evidence: this.ring, evidencePlace: this.place };
  }
}
