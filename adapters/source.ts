/**
 * The one small interface behind which every source of readings lives. A source moves bytes, frames and decodes them,
 * and hands numbers to the sink; it knows nothing of bands, detectors or screens.
 */

/** One channel that a source serves. */
export interface Wanted {
  /** The number under which the sink knows the channel. */
  readonly slot: number;
  /** The channel's identifier, for messages. */
  readonly channel: string;
  /** `from: logger/flow` asks for the field `flow`; null: the source's only value. */
  readonly field: string | null;
  /** MQTT topic or topic filter; null for sources without topics. */
  readonly topic: string | null;
  /** RFC 6901 JSON Pointers into the payload or line; null: the payload is the number / arrival time / no sequence. */
  readonly value: string | null;
  readonly time: string | null;
  readonly sequence: string | null;
  /** Spacing of readings in ms where the source gives no times (recordings); null: unknown. */
  readonly every: number | null;
}

export type SourcePhase = 'connecting' | 'open' | 'lost' | 'ended' | 'stopped';

/** What was seen of a source that was no reading, by kind; each is counted, none is fatal. */
export type Fault =
  | 'not-a-number' // the text is no number by the strict grammar
  | 'missing-field' // the line or payload lacks a column, key or pointer that a channel wants
  | 'too-long' // a line or payload beyond the bound
  | 'bad-bytes' // invalid UTF-8 or NUL
  | 'bad-json'
  | 'bad-time'
  | 'stale' // a retained MQTT message at subscription: old news
  | 'repeated' // seen already, by its sequence number
  | 'unread'; // mostly unreadable bytes, such as from a wrong baud rate

/** Where a source delivers. Its methods never throw and never block. */
export interface Sink {
  /**
   * One reading. `time` in ms since the epoch. NaN and infinities are passed on as they are: the engine calls them off-scale.
   */
  reading(slot: number, time: number, value: number): void;
  /** The last known value from before the connection (a retained message): to show, not to judge. */
  stale(slot: number, time: number, value: number): void;
  /** A change of the source's state, with a sentence for people (already cleaned of hostile text). */
  phase(phase: SourcePhase, sentence: string): void;
  /** Something that was no reading. `sample` is raw: the sink cleans and cuts it. */
  fault(fault: Fault, sample: string): void;
  /** How far a source with a known length has come, 0 to 1. */
  progress?(fraction: number): void;
  /** Resolves once every reading handed over so far has been through the engine and its alarms are on disk. Rejects when they cannot be stored. */
  durable(): Promise<void>;
  /** For sources that can be held back (files, pipes): a promise to await before handing over more, or null to go on. */
  pressure(): Promise<void> | null;
  /** The time of arrival, ms since the epoch, from the stand's clock. */
  now(): number;
}

export interface Source {
  readonly name: string;
  /** Starts delivering; returns at once (a source that cannot open yet keeps trying and says so through `phase`). */
  start(sink: Sink): void;
  /** Stops delivering and frees what it held. After it resolves the sink is not called again. Safe to call twice. */
  stop(): Promise<void>;
  /** Resolves when the source has ended by itself (a recording at its end, closed standard input); never for live sources until stopped. */
  readonly ended: Promise<void>;
}
