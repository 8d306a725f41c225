/** Statistics of the rolling window, in the channel's unit. NaN where there are too few readings. */
export interface WindowStatistics {
  readonly n: number;
  readonly mean: number;
  /** Sample standard deviation, n - 1. */
  readonly sd: number;
  readonly median: number;
  /** Median absolute deviation from the median, unscaled. */
  readonly mad: number;
  readonly min: number;
  readonly max: number;
}
