import type { MqttOptions, RecordingOptions, SerialOptions, SimulatedOptions, StdinOptions } from '../../adapters/options.js';
import type { ChannelSpec } from '../engine/spec.js';

export type SourceConfig =
  | { readonly name: string; readonly kind: 'serial'; readonly options: SerialOptions }
  | { readonly name: string; readonly kind: 'mqtt'; readonly options: MqttOptions }
  | { readonly name: string; readonly kind: 'stdin'; readonly options: StdinOptions }
  | { readonly name: string; readonly kind: 'recording'; readonly options: RecordingOptions }
  | { readonly name: string; readonly kind: 'simulated'; readonly options: SimulatedOptions };

/** Which source, and which part of it, a channel comes from. */
export interface ChannelOrigin {
  readonly source: string;
  readonly field: string | null;
  readonly topic: string | null;
  readonly value: string | null;
  readonly time: string | null;
  readonly sequence: string | null;
}

export interface ChannelConfig {
  readonly origin: ChannelOrigin;
  readonly spec: ChannelSpec;
}

export interface LogConfig {
  /** Absolute path of the alarm log. */
  readonly file: string;
  /** Size in bytes beyond which the log is rotated. */
  readonly maxBytes: number;
}

/** A stand file, read and found right. */
export interface Stand {
  readonly file: string;
  readonly name: string;
  readonly limits: 'textbook' | 'budget';
  /** The false-alarm budget for the whole stand: mean time between false alarms in ms; null where none is stated. */
  readonly budget: number | null;
  readonly sources: readonly SourceConfig[];
  readonly channels: readonly ChannelConfig[];
  readonly log: LogConfig;
}
