import type { Rule } from './rules.js';

/** A band as the stand file gives it, or how many readings to learn one from. */
export type BandSource =
  | { readonly centre: number; readonly sigma: number; readonly n?: number; readonly id?: string }
  | { readonly learn: number };

/** Everything the engine must know of one channel. Plain data: it serialises. */
export interface ChannelSpec {
  readonly channel: string;
  readonly unit: string;
  /** Expected interval between readings in ms; null: unknown, and silence is not watched unless `silentAfter` is given. */
  readonly every: number | null;
  /** Silence in ms after which the channel counts as silent; null: not watched. */
  readonly silentAfter: number | null;
  /** What the instrument can report; null: anything finite. */
  readonly range: readonly [number, number] | null;
  /** What the work may be; null: not watched. */
  readonly tolerance: readonly [number, number] | null;
  /** Smallest step of the instrument, in the channel's unit; null: judged from the readings. */
  readonly resolution: number | null;
  readonly band: BandSource;
  readonly rules: readonly Rule[];
  /** Control limits in sigmas; the zones of all rules are stretched by g = k / 3. */
  readonly k: number;
  /** Length of the run on one side that `eight-one-side` asks for (8 unless a budget stretches it). */
  readonly sideRun: number;
  /** Whether the `frozen` detector is on. */
  readonly frozen: boolean;
  /** Odds below which a run of equal values is no longer credible (probability). */
  readonly frozenOdds: number;
  /** Readings in the rolling window. */
  readonly window: number;
  /** Readings in a row back in the band, without a signal, after which an alarm clears. */
  readonly clearAfter: number;
}
