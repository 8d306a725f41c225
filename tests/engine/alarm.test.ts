import { describe, expect, it } from 'vitest';
import { Channel } from '../../src/engine/channel.js';
import type { AlarmRaised, EngineEvent } from '../../src/engine/events.js';
import { spec } from './spec.js';

const run = (channel: Channel, values: readonly number[]): string[] =>
  values.flatMap((value, i) => channel.take(i * 100, value).map((event: EngineEvent) => `${event.event} ${event.index}`));

const newestOf = (channel: Channel, time: number, value: number): AlarmRaised =>
  channel.take(time, value).find((event): event is AlarmRaised => event.event === 'raised')!;

describe('an alarm', () => {
  it('does not clear while readings are beyond the limits, signals or not', () => {
    const channel = new Channel(spec({ rules: ['trend-of-6'], clearAfter: 2 }));
    // The trend ends, but the readings stay outside the limits: there is no calm.
    expect(run(channel, [40, 40.4, 40.8, 41.2, 41.6, 42, 42, 42, 42, 40, 40])).toEqual(['signal 5', 'raised 5', 'cleared 10']);
  });

  it('does not clear by readings off the scale, and begins to count anew after one', () => {
    const channel = new Channel(spec({ rules: ['one-beyond-3'], clearAfter: 3 }));
    const events = [42, 40, 40, NaN, 40, 40, 40].flatMap((value, i) => [...channel.take(i, value)]);
    const cleared = events.filter((event) => event.event === 'cleared');
    expect(cleared.map(({ detector, index }) => `${detector} ${index}`)).toEqual(['one-beyond-3 6', 'off-scale 6']);
  });

  it('carries the 32 newest readings that took part, its own the last', () => {
    const channel = new Channel(spec({ rules: ['one-beyond-3'] }));
    for (let i = 0; i < 50; i++) channel.take(i, i === 45 ? NaN : 40 + i / 1000);
    const { readings } = newestOf(channel, 50, 42).evidence;
    expect(readings).toHaveLength(32);
    expect(readings.map(({ index }) => index)).not.toContain(45);
    expect(readings.at(-2)).toEqual({ index: 49, time: 49, value: 40.049 });
    expect(readings.at(-1)).toEqual({ index: 50, time: 50, value: 42 });
  });
});

describe('a snapshot', () => {
  it('is refused where its arrays do not fit', () => {
    const channel = new Channel(spec());
    const snapshot = channel.snapshot();
    expect(() => Channel.restore(channel.spec, { ...snapshot, arrays: { ...snapshot.arrays, doubles: [1] } })).toThrow(/does not fit/);
  });
});
