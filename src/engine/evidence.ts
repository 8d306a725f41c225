import type { EvidenceReading } from './events.js';
import { INDEX, TIME, VALUE } from './hand.js';

const FEWEST = 32; // readings that evidence keeps at least

/**
 * The newest readings of a channel as they came, with their times; those off the scale too. As many as the longest
 * pattern looks back, so that every verdict recomputes.
 */
export class EvidenceRing {
  /** time and value by turns */
  private readonly ring: Float64Array;
  private readonly mask: number;

  /** @param longest readings that the longest pattern spans */
  constructor(
    private readonly hand: Float64Array,
    longest: number,
  ) {
    const kept = 2 ** Math.ceil(Math.log2(Math.max(FEWEST, longest))); // a place is then a mask and no division
    this.ring = new Float64Array(2 * kept);
    this.mask = kept - 1;
  }

  /** Keeps the reading at hand. */
  push(): void {
    const { hand, ring } = this;
    const place = (hand[INDEX]! & this.mask) << 1;
    ring[place] = hand[TIME]!;
    ring[place + 1] = hand[VALUE]!;
  }

  /** The newest readings, oldest first. */
  list(): EvidenceReading[] {
    const { ring, mask } = this;
    const newest = this.hand[INDEX]!;
    const readings: EvidenceReading[] = [];
    for (let index = Math.max(0, newest - mask); index <= newest; index++) {
      const place = (index & mask) << 1;
      readings.push({ index, time: ring[place]!, value: ring[place + 1]! });
    }
    return readings;
  }

  arrays(): Readonly<Record<string, Float64Array>> {
    return { evidence: this.ring };
  }
}
