import type { Band } from './band.js';
import type { Detector, Side } from './rules.js';

/** One reading as evidence keeps it. */
export interface EvidenceReading {
  readonly index: number;
  /** ms since the epoch, UTC. */
  readonly time: number;
  readonly value: number;
}

/** What a verdict recomputes from: the band and limits in force, and the newest readings that took part. */
export interface Evidence {
  readonly band: Band | null;
  /** Further limits that the detector used (tolerance, range, silentAfter, repeats, t limit ...), by name. */
  readonly limits: Readonly<Record<string, number>>;
  readonly readings: readonly EvidenceReading[];
}

/** A detector's verdict at one reading. Times are ms since the epoch; `wire` in src/record writes them as ISO 8601. */
export interface Signal {
  readonly event: 'signal';
  readonly channel: string;
  /** The channel's readings counted from 0. */
  readonly index: number;
  readonly time: number;
  readonly detector: Detector;
  readonly side: Side | null;
  /** null where there is no number (silence, not a number). */
  readonly value: number | null;
  /** Deviation in sigmas of the band; null while settling or without a value. */
  readonly z: number | null;
}

/** A signal under management. One at a time for each channel and detector. */
export interface AlarmRaised extends Omit<Signal, 'event'> {
  readonly event: 'raised';
  /** Stable identifier: the same readings give the same one. */
  readonly alarm: string;
  readonly unit: string;
  /** Probability of such a reading (for a rule: such a pattern's newest reading) when nothing has changed; null where there is none. */
  readonly odds: number | null;
  readonly evidence: Evidence;
  /** The alarm in plain words. */
  readonly sentence: string;
}

export interface AlarmCleared {
  readonly event: 'cleared';
  readonly alarm: string;
  readonly channel: string;
  readonly detector: Detector;
  readonly index: number;
  readonly time: number;
  readonly value: number | null;
  readonly z: number | null;
  /** Signals it carried, the first included, and the time from the first of them to the clearing, in ms. */
  readonly signals: number;
  readonly lasted: number;
  readonly sentence: string;
}

/** A channel's band has been established from its first readings (settling is over), or could not be. */
export interface BandLearned {
  readonly event: 'band';
  readonly channel: string;
  readonly index: number;
  readonly time: number;
  /** null: the baseline cannot serve (its spread is zero); settling starts again. */
  readonly band: Band | null;
  readonly sentence: string;
}

export type EngineEvent = Signal | AlarmRaised | AlarmCleared | BandLearned;
