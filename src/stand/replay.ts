import { setImmediate as turn } from 'node:timers/promises';
import { recordingBytes } from '../../adapters/recording/bytes.js';
import { RecordingReader } from '../../adapters/recording/reader.js';
import type { Fault, Wanted } from '../../adapters/source.js';
import { Channel } from '../engine/channel.js';
import type { EngineEvent } from '../engine/events.js';
import type { ChannelSpec } from '../engine/spec.js';
import { tickBefore } from './silence.js';

/** What a replay tells while it runs, in the order of the recording. */
export interface ReplayListener {
  onEvents(events: readonly EngineEvent[]): void;
  /** After each reading has been through its channel; left out where nobody asks, as it costs. */
  readonly onReading?: (channel: Channel, time: number) => void;
  onFault(fault: Fault, sample: string): void;
  onProgress(fraction: number): void;
  /** Awaited between chunks: the reader of our output may need a pause. */
  drained(): Promise<void> | null;
}

export interface Replayed {
  readonly channels: readonly Channel[];
  readonly readings: number;
  /** The recording stopped in the middle (a torn gzip); else null. */
  readonly torn: string | null;
  /** Whether the recording says when its readings were taken; if not they are spaced by `every` from the epoch on. */
  readonly timed: boolean;
  /** Places of the channels that the recording does not hold. */
  readonly absent: readonly number[];
}

/**
 * A recording through the engine, as fast as it goes. A channel's column is the one that bears its name, else the one
 * of its field. The same recording and specifications give the same events on every run: time comes from the recording.
 * A silence is told before the reading that ends it, as of the moment at which it was one; that of a channel which
 * never speaks again at the end of the recording, if the other channels' readings show that it was one.
 * @param fields for each channel the field of the stand file, or null
 * @param columns for channels whose name in the recording was given: that name, which is then the only one
 * @throws UserError where the recording cannot be read or has none of the channels
 */
export async function replay(
  path: string,
  specs: readonly ChannelSpec[],
  fields: readonly (string | null)[],
  listener: ReplayListener,
  columns: ReadonlyMap<string, string> = new Map(),
): Promise<Replayed> {
  const channels = specs.map((spec) => new Channel(spec));
  const wanted = specs.map(({ channel, every }, slot): Wanted => {
    const field = fields[slot] ?? null;
    const column = columns.get(channel);
    // The channel's name comes first here, since recordings are kilter's own as often as an instrument's.
    const [first, second] = column === undefined ? [channel, field ?? channel] : [column, column];
    return { slot, channel: second, field: first, topic: null, value: null, time: null, sequence: null, every };
  });
  let readings = 0;
  let newest = -Infinity;
  const { onReading } = listener;
  const tell = (events: readonly EngineEvent[]): void => {
    if (events.length > 0) listener.onEvents(events);
  };
  const bytes = await recordingBytes(path);
  const reader = new RecordingReader(
    wanted,
    {
      reading: (slot, time, value) => {
        const channel = channels[slot]!;
        readings++;
        if (time > newest) newest = time;
        tell(tickBefore(channel, time));
        tell(channel.take(time, value));
        if (onReading) onReading(channel, time);
      },
      fault: (fault, sample) => listener.onFault(fault, sample),
    },
    path,
  );
  for await (const chunk of bytes.chunks) {
    reader.push(chunk);
    listener.onProgress(bytes.fraction());
    await (listener.drained() ?? turn());
  }
  reader.end(bytes.torn() !== null);
  for (const channel of channels) tell(tickBefore(channel, newest));
  return { channels, readings, torn: bytes.torn(), timed: reader.timed ?? false, absent: reader.absent };
}
