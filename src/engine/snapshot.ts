import type { ActiveAlarm } from './alarm.js';
import type { Band } from './band.js';

/** The whole state of a channel as plain data. Numbers that JSON lacks stand as words. */
export interface ChannelSnapshot {
  readonly version: 1;
  /** The specification it belongs to, as JSON: another one refuses it. */
  readonly spec: string;
  readonly band: Band | null;
  readonly alarms: readonly ActiveAlarm[];
  readonly arrays: Readonly<Record<string, readonly (number | string)[]>>;
}

type Arrays = Readonly<Record<string, Float64Array | Int32Array | Uint32Array>>;

/** State arrays as plain data; NaN and the infinities, which JSON cannot say, as strings. */
export function pack(arrays: Arrays): Record<string, (number | string)[]> {
  return Object.fromEntries(
    Object.entries(arrays).map(([name, array]) => [
      name,
      Array.from(array, (x: number) => (Number.isFinite(x) && !Object.is(x, -0) ? x : Object.is(x, -0) ? '-0' : String(x))),
    ]),
  );
}

/** @throws Error where an array is missing or of another length */
export function unpack(packed: ChannelSnapshot['arrays'], arrays: Arrays): void {
  for (const [name, array] of Object.entries(arrays)) {
    const from = packed[name];
    if (from?.length !== array.length) throw new Error(`The snapshot's '${name}' does not fit this version of the engine.`);
    from.forEach((x, i) => (array[i] = Number(x)));
  }
}
