/** Options of every source, typed once. The stand file's schema fills them; each adapter documents what they do. */

export type LineFormat = 'number' | 'csv' | 'pairs' | 'json';

export interface LineOptions {
  readonly lines: LineFormat;
  /** For csv: the fields' names in order; `-` skips a column. */
  readonly columns: readonly string[] | null;
  /** Longest line in bytes. */
  readonly maxLine: number;
}

export interface SerialOptions extends LineOptions {
  readonly path: string;
  readonly baudRate: number;
  readonly dataBits: 5 | 6 | 7 | 8;
  readonly parity: 'none' | 'even' | 'odd';
  readonly stopBits: 1 | 2;
  /** Back-off between attempts to open, ms: doubled from the first to the second, with jitter. */
  readonly retryFrom: number;
  readonly retryTo: number;
}

export interface MqttOptions {
  readonly url: string;
  readonly protocol: '3.1.1' | '5';
  readonly clientId: string;
  readonly keepalive: number;
  readonly qos: 0 | 1;
  /** PEM files. */
  readonly ca: string | null;
  readonly cert: string | null;
  readonly key: string | null;
  /** Names of environment variables, or files, that hold them; never the secrets themselves. */
  readonly user: Secret | null;
  readonly password: Secret | null;
  /** Largest payload in bytes. */
  readonly maxPayload: number;
  readonly retryFrom: number;
  readonly retryTo: number;
}

export type Secret = { readonly env: string } | { readonly file: string };

export type StdinOptions = LineOptions;

export interface RecordingOptions {
  /** CSV with a header, or JSON Lines; either may be gzip. Told apart by content, not by name. */
  readonly path: string;
}

export interface SimulatedOptions {
  readonly seed: number;
  /** Whether faults come in turn. */
  readonly faults: boolean;
  /** 1: in real time; 10: ten times as fast; 0: as fast as it goes. */
  readonly speed: number;
}
