import type { Disk } from './disk.js';

export interface AlarmLogOptions {
  /** Size in bytes beyond which the file is rotated; only a single line that is longer makes a larger file. */
  readonly maxBytes: number;
  /** Told once, in a sentence with what to do, when records cannot reach the disk; null when they do again. */
  readonly onTrouble: (sentence: string | null) => void;
  /** Told what was found or happened and needs no action at once. */
  readonly onNote: (sentence: string) => void;
  /** The first record of this process: `{event: 'opened', time, version, stand, ...}`. `tornBytes` and `from` are added where they apply. */
  readonly opening?: object;
  /** Bytes of records kept in memory while the disk fails; default 64 MiB. New ones beyond are dropped, counted, and the count logged. */
  readonly maxBacklogBytes?: number;
  /** Bytes of the reserve beside the log; default 64 KiB; 0: none. */
  readonly ballastBytes?: number;
  /** Wait before the first retry in ms, doubled for each further one up to five times as long; default 1000. */
  readonly retryAfter?: number;
  /** Longest that `close` goes on in ms when nothing reaches the disk; default 800. */
  readonly closeWithin?: number;
  readonly now?: () => number;
  readonly disk?: Disk;
}
