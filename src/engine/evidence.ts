import type { EvidenceReading } from './events.js';

/** Readings that evidence keeps: more than the longest pattern looks back. */
export const KEPT = 32;

/** The newest readings of a channel as they came, with their times; those off the scale too. */
export class EvidenceRing {
  private readonly values = new Float64Array(KEPT);
  private readonly times = new Float64Array(KEPT);

  push(index: number, time: number, value: number): void {
    const place = index % KEPT;
    this.values[place] = value;
    this.times[place] = time;
  }

  /** @param newest index of the newest reading, -1 before the first. @returns oldest first */
  list(newest: number): EvidenceReading[] {
    const readings: EvidenceReading[] = [];
    for (let index = Math.max(0, newest - KEPT + 1); index <= newest; index++) {
      const place = index % KEPT;
      readings.push({ index, time: this.times[place]!, value: this.values[place]! });
    }
    return readings;
  }

  arrays(): Readonly<Record<string, Float64Array>> {
    return { evidenceValues: this.values, evidenceTimes: this.times };
  }
}
