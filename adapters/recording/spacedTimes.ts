import type { Wanted } from '../source.js';

const UNKNOWN = 1000; // ms between readings where the stand file does not say

/** Times for a recording that has none: each channel's readings lie `every` apart, from the epoch on; 1 s where that is not known. */
export class SpacedTimes {
  private readonly next = new Map<number, number>();
  private readonly every: ReadonlyMap<number, number>;

  constructor(wanted: readonly Wanted[]) {
    this.every = new Map(wanted.map(({ slot, every }) => [slot, every ?? UNKNOWN]));
  }

  /** @returns ms since the epoch of the channel's next place in time, which is then taken */
  take(slot: number): number {
    const count = this.next.get(slot) ?? 0;
    this.next.set(slot, count + 1);
    return count * (this.every.get(slot) ?? UNKNOWN); // no sum that gathers rounding
  }
}
