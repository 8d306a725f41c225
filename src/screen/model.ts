import type { Band } from '../engine/band.js';
import type { Detector, Side } from '../engine/rules.js';
import type { WindowStatistics } from '../engine/window.js';

/** What the screen shows of one channel. Strings are already cleaned. Views read it and change nothing. */
export interface ChannelView {
  readonly channel: string;
  readonly unit: string;
  /** `waiting`: nothing came yet. `alarm`: at least one alarm stands. */
  readonly state: 'waiting' | 'settling' | 'normal' | 'alarm';
  /** While settling: readings taken and needed. */
  readonly settled: readonly [number, number] | null;
  readonly index: number;
  readonly time: number | null;
  readonly value: number | null;
  /** An old value from a retained message, shown until a new reading comes. */
  readonly stale: boolean;
  readonly z: number | null;
  readonly odds: number | null;
  readonly band: Band | null;
  readonly tolerance: readonly [number, number] | null;
  /** Smallest step of the instrument; null: not known. */
  readonly resolution: number | null;
  /** Newest readings, oldest first; `trendLength` of them are valid. Times in ms run alongside. */
  readonly trend: Float64Array;
  readonly trendTimes: Float64Array;
  readonly trendLength: number;
  /** Only for the selected channel (order statistics cost). */
  readonly window: WindowStatistics | null;
  readonly lag1: number | null;
}

export interface AlarmView {
  readonly alarm: string;
  readonly channel: string;
  readonly detector: Detector;
  readonly side: Side | null;
  readonly sentence: string;
  readonly odds: number | null;
  /** ms since the epoch. */
  readonly since: number;
  readonly signals: number;
  /** null while it stands. */
  readonly clearedAt: number | null;
}

export interface SourceView {
  readonly source: string;
  readonly phase: 'connecting' | 'open' | 'lost' | 'ended' | 'stopped';
  readonly sentence: string;
  readonly faults: number;
}

export interface StandView {
  readonly stand: string;
  readonly now: number;
  readonly channels: readonly ChannelView[];
  /** Standing first, newest first; then lately cleared ones. */
  readonly alarms: readonly AlarmView[];
  readonly sources: readonly SourceView[];
  /** Readings a second, all channels. */
  readonly rate: number;
  /** null while the alarm log is well; else a sentence (disk full ...). */
  readonly logTrouble: string | null;
  /** Lasting words for the status line (such as: limits textbook, what that costs); null: none. */
  readonly notice: string | null;
}
