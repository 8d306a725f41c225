/** Where a band came from. */
export type BandOrigin = 'given' | 'learned' | 'accepted';

/**
 * The established normal band of a channel. It is frozen: nothing that happens after it was established moves it.
 * All values in the channel's unit.
 */
export interface Band {
  /** Stable name: `given`, `learned@<index of its last reading>`, or the fingerprint of an accepted band. */
  readonly id: string;
  readonly origin: BandOrigin;
  readonly centre: number;
  readonly sigma: number;
  /** Readings it was obtained from; null where it was given. */
  readonly n: number | null;
  /** Standard uncertainty of the centre and of sigma; null where the band was given. */
  readonly centreUncertainty: number | null;
  readonly sigmaUncertainty: number | null;
  /** Control limits at `k` sigmas. */
  readonly k: number;
  readonly low: number;
  readonly high: number;
}
