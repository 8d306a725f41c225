import { Z } from './hand.js';

const AT_Z = Z;
const PER_SIGMA = 4;
const REACH = 6;
const BINS = 2 * REACH * PER_SIGMA;

/** Readings counted by their deviation in quarter sigmas of the band, from -6 to 6, with a bin below and one above. */
export class Histogram {
  /** counts[0] lies below -6 sigma, counts[1] from -6 to -5.75 ..., the last above 6. A full count stays full. */
  readonly counts = new Uint32Array(BINS + 2);

  constructor(private readonly hand: Float64Array) {}

  /** Counts the reading at hand. */
  add(): void {
    const z = this.hand[AT_Z]!;
    const at = z >= REACH ? BINS + 1 : z < -REACH ? 0 : ((z + REACH) * PER_SIGMA + 1) | 0;
    const count = this.counts[at]!;
    if (count < 0xffffffff) this.counts[at] = count + 1;
  }
}
