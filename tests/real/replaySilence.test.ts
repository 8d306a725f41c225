import { describe, expect, it } from 'vitest';
import type { EngineEvent } from '../../src/engine/events.js';
import { replay } from '../../src/stand/replay.js';
import { spec } from '../engine/spec.js';
import { fileOf } from './recordingFiles.js';

/** Silences in a recording of channels that may be silent for 2 s: what happened, where, when (s). */
async function silences(text: string, channels: readonly string[]): Promise<string[]> {
  const told: string[] = [];
  const onEvents = (events: readonly EngineEvent[]): void => {
    for (const event of events)
      if ((event.event === 'raised' || event.event === 'cleared') && event.detector === 'silent') told.push(`${event.event} ${event.channel} ${event.time / 1000}`);
  };
  const specs = channels.map((channel) => spec({ channel, silentAfter: 2000 }));
  await replay(fileOf(text), specs, specs.map(() => null), { onEvents, onFault: () => undefined, onProgress: () => undefined, drained: () => null });
  return told;
}

describe('silence in a recording', () => {
  it('is found by the recording\'s own times, at the moment at which it was one', async () => {
    expect(await silences('time,flow\n10,40\n12,40.1\n17,40.2\n18,40.1\n', ['flow'])).toEqual(['raised flow 14.001', 'cleared flow 17']);
  });

  it('is none where the readings come just in time', async () => {
    expect(await silences('time,flow\n10,40\n12,40.1\n14,40.2\n', ['flow'])).toEqual([]);
  });

  it('begins where cells are empty', async () => {
    expect(await silences('time,flow\n10,40\n11,\n12,\n13,\n14,40\n', ['flow'])).toEqual(['raised flow 12.001', 'cleared flow 14']);
  });

  it('of a channel that never speaks again is told at the end', async () => {
    const rows = Array.from({ length: 20 }, (_, i) => `${i},40,${i < 5 ? 40 : ''}\n`).join('');
    expect(await silences(`time,flow,inlet\n${rows}`, ['flow', 'inlet'])).toEqual(['raised inlet 6.001']);
  });

  it('is not seen in a recording that gives one channel after the other', async () => {
    const rows = ['flow', 'inlet'].flatMap((channel) => Array.from({ length: 10 }, (_, i) => `${i},${channel},40\n`)).join('');
    expect(await silences(`time,channel,value\n${rows}`, ['flow', 'inlet'])).toEqual([]);
  });

  it('is not seen in a channel that the recording does not hold', async () => {
    expect(await silences('time,flow\n1,40\n2,40\n3,40\n4,40\n5,40\n', ['flow', 'inlet'])).toEqual([]);
  });
});
