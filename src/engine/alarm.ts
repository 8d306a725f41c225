import type { Detector, Side } from './rules.js';

/** A standing alarm. One at a time for each channel and detector. Plain data: it serialises. */
export interface ActiveAlarm {
  /** Stable identifier: the same readings give the same one. */
  readonly alarm: string;
  readonly detector: Detector;
  readonly side: Side | null;
  readonly raisedIndex: number;
  readonly raisedTime: number;
  /** Signals carried so far, the first included. */
  signals: number;
  /** Readings in a row that were back in the band without a signal of this detector. */
  calm: number;
}

/** `<channel>/<detector>/<time>-<index>`: the time in ISO 8601's basic form, so that identifiers of several runs differ. */
export function alarmId(channel: string, detector: Detector, time: number, index: number): string {
  return `${channel}/${detector}/${compactTime(time)}-${index}`;
}

function compactTime(time: number): string {
  if (!(Math.abs(time) <= 8.64e15)) return String(time); // beyond the calendar of ECMAScript
  return new Date(time).toISOString().replace(/[-:.]/g, '');
}
