import type { EvidenceReading } from './events.js';
import { INDEX, TIME, VALUE } from './hand.js';

/** Readings that evidence keeps: more than the longest pattern looks back. A power of two, so that a place is a mask and no division. */
export const KEPT = 32;
const PLACE = KEPT - 1;

/** The newest readings of a channel as they came, with their times; those off the scale too. */
export class EvidenceRing {
  private readonly values = new Float64Array(KEPT);
  private readonly times = new Float64Array(KEPT);

  constructor(private readonly hand: Float64Array) {}

  /** Keeps the reading at hand. */
  push(): void {
    const { hand } = this;
    const place = hand[INDEX]! & PLACE;
    this.values[place] = hand[VALUE]!;
    this.times[place] = hand[TIME]!;
  }

  /** The newest readings, oldest first. */
  list(): EvidenceReading[] {
    const newest = this.hand[INDEX]!;
    const readings: EvidenceReading[] = [];
    for (let index = Math.max(0, newest - KEPT + 1); index <= newest; index++) {
      const place = index & PLACE;
      readings.push({ index, time: this.times[place]!, value: this.values[place]! });
    }
    return readings;
  }

  arrays(): Readonly<Record<string, Float64Array>> {
    return { evidenceValues: this.values, evidenceTimes: this.times };
  }
}
