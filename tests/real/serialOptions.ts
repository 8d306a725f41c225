import type { SerialOptions } from '../../adapters/options.js';
import type { Wanted } from '../../adapters/source.js';

/** Options for a port under test: quick to come back, else the common ones. */
export function onPort(path: string, more: Partial<SerialOptions> = {}): SerialOptions {
  const line = { baudRate: 115_200, dataBits: 8, parity: 'none', stopBits: 1 } as const;
  return { path, ...line, retryFrom: 20, retryTo: 200, lines: 'number', columns: null, maxLine: 256, ...more };
}

/** One channel that wants a field of a line (null: the line's only number) under slot 0. */
export const wantedNumber: readonly Wanted[] = [
  { slot: 0, channel: 'flow', field: null, topic: null, value: null, time: null, sequence: null, every: null },
];
