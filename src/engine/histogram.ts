import { Z } from './state.js';

const AT_Z = Z;
const PER_SIGMA = 4;
const REACH = 6;
const BINS = 2 * REACH * PER_SIGMA;
const FULL = 0xffffffff;

/**
 * Bins for readings by their deviation in quarter sigmas of the band: bin 0 lies below -6 sigma, bin 1 from -6 to -5.75
 * and so on, the last above 6.
 */
export function emptyHistogram(): Uint32Array {
  return new Uint32Array(BINS + 2);
}

/** Counts the reading at hand. A full count stays full. */
export function tally(s: Float64Array, counts: Uint32Array): void {
  const z = s[AT_Z]!;
  const bin = z >= REACH ? BINS + 1 : z < -REACH ? 0 : ((z + REACH) * PER_SIGMA + 1) | 0;
  const count = counts[bin]!;
  if (count < FULL) counts[bin] = count + 1;
}
