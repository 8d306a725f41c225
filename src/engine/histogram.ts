/** Readings counted by their deviation in quarter sigmas of the band, from -6 to 6 sigma, with a bin below and one above. */
export const PER_SIGMA = 4;
export const REACH = 6;
export const BINS = 2 * REACH * PER_SIGMA + 2;
/** A full count stays full. */
export const COUNT_FULL = 0xffffffff;

/** Counts: 0 lies below -6 sigma, 1 from -6 up to -5.75 and so on, the last from 6 on. */
export function emptyHistogram(): Uint32Array {
  return new Uint32Array(BINS);
}
