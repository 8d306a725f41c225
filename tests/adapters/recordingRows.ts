import { RecordingReader } from '../../adapters/recording/reader.js';
import type { Wanted } from '../../adapters/source.js';

/** A channel's name, or its name and its field. */
export type Name = string | readonly [channel: string, field: string];

/** Channels as a stand would want them of a recording: in slots 0, 1 ..., a reading each 100 ms. */
export function wantedChannels(...names: readonly Name[]): Wanted[] {
  return names.map((name, slot): Wanted => {
    const [channel, field] = typeof name === 'string' ? [name, null] : name;
    return { slot, channel, field, topic: null, value: null, time: null, sequence: null, every: 100 };
  });
}

export interface Rowed {
  readonly readings: [slot: number, time: number, value: number][];
  readonly faults: string[];
  readonly reader: RecordingReader;
}

/** What a recording's reader makes of bytes that come in chunks cut at the given places. */
export function rowsOf(text: string | Buffer, wanted: readonly Wanted[] = wantedChannels('flow'), cuts: readonly number[] = [], torn = false): Rowed {
  const readings: Rowed['readings'] = [];
  const faults: string[] = [];
  const sink = {
    reading: (slot: number, time: number, value: number) => void readings.push([slot, time, value]),
    fault: (fault: string) => void faults.push(fault),
  };
  const reader = new RecordingReader(wanted, sink, 'run.csv');
  const bytes = Buffer.from(text);
  let from = 0;
  for (const cut of [...cuts, bytes.length]) {
    reader.push(Buffer.from(bytes.subarray(from, cut))); // a copy: what is kept must not lean on the chunk
    from = cut;
  }
  reader.end(torn);
  return { readings, faults, reader };
}

/** The values alone. */
export const valuesOf = (text: string | Buffer, ...names: readonly Name[]): number[] =>
  rowsOf(text, names.length > 0 ? wantedChannels(...names) : undefined).readings.map(([, , value]) => value);
