import { describe, expect, it } from 'vitest';
import type { Sink, Source } from '../../adapters/source.js';
import type { ChannelSpec } from '../../src/engine/spec.js';
import { AlarmBook } from '../../src/stand/alarmBook.js';
import { Clock } from '../../src/stand/clock.js';
import { Runtime, type Kept } from '../../src/stand/runtime.js';

const SPEC: ChannelSpec = {
  channel: 'flow',
  unit: 'L/min',
  every: 100,
  silentAfter: 500,
  range: null,
  tolerance: null,
  resolution: null,
  band: { centre: 40, sigma: 0.5 },
  rules: ['one-beyond-3'],
  k: 3,
  sideRun: 8,
  frozen: false,
  frozenOdds: 1e-9,
  window: 50,
  clearAfter: 2,
};

/** A source that the test plays itself. */
class Played implements Source {
  readonly ended = new Promise<void>(() => undefined);
  sink: Sink | null = null;
  stopped = false;
  constructor(readonly name: string) {}
  start(sink: Sink): void {
    this.sink = sink;
  }
  stop(): Promise<void> {
    this.stopped = true;
    return Promise.resolve();
  }
}

function rig(ownTime: readonly string[] = []): { runtime: Runtime; source: Played; kept: Kept[]; book: AlarmBook; pass(ms: number): void } {
  let mono = 0;
  const source = new Played('bus');
  const kept: Kept[] = [];
  const book = new AlarmBook();
  const runtime = new Runtime({
    channels: [{ origin: { source: 'bus', field: null, topic: null, value: null, time: null, sequence: null }, spec: SPEC }],
    sources: [source],
    ownTime: new Set(ownTime),
    log: null,
    history: 10,
    clock: new Clock(undefined, () => 1_700_000_000_000 + mono, () => mono),
    onPhase: () => undefined,
    onKept: (event) => {
      kept.push(event);
      book.take(event);
    },
  });
  return { runtime, source, kept, book, pass: (ms) => (mono += ms) };
}

const brief = (events: readonly Kept[]): string[] => events.map((event) => `${event.event} ${event.event === 'band' ? '' : event.detector}`);

describe('runtime', () => {
  it('carries a reading beyond the limits to an alarm, and clears it after two readings back', async () => {
    const { runtime, source, kept, book } = rig();
    runtime.start();
    const { sink } = source;
    sink!.reading(0, 1000, 40);
    sink!.reading(0, 1100, 42);
    expect(book.standingCount).toBe(1);
    sink!.reading(0, 1200, 40);
    sink!.reading(0, 1300, 40);
    expect(brief(kept)).toEqual(['raised one-beyond-3', 'cleared one-beyond-3']);
    expect(book.standingCount).toBe(0);
    expect(book.list()).toHaveLength(1);
    await runtime.stop();
    expect(source.stopped).toBe(true);
  });

  it('counts silence from the arrival, not by an instrument whose clock is an hour behind', async () => {
    const { runtime, source, kept, pass } = rig();
    runtime.start();
    source.sink!.reading(0, runtime.clock.now() - 3_600_000, 40);
    pass(400);
    await new Promise((resolve) => setTimeout(resolve, 250)); // a look or two: 400 ms of silence are allowed
    expect(kept).toEqual([]);
    pass(200);
    await new Promise((resolve) => setTimeout(resolve, 250));
    expect(brief(kept)).toEqual(['raised silent']);
    source.sink!.reading(0, runtime.clock.now() - 3_600_000, 40);
    expect(brief(kept)).toEqual(['raised silent', 'cleared silent']);
    await runtime.stop();
  });

  it("finds a silence in a recording by the recording's own times, and none by the wall clock", async () => {
    const { runtime, source, kept, pass } = rig(['bus']);
    runtime.start();
    source.sink!.reading(0, 1000, 40);
    pass(10_000);
    await new Promise((resolve) => setTimeout(resolve, 250));
    expect(kept).toEqual([]);
    source.sink!.reading(0, 1400, 40);
    source.sink!.reading(0, 3000, 40);
    expect(brief(kept)).toEqual(['raised silent', 'cleared silent']);
    expect(kept[0]).toMatchObject({ time: 1901 });
    await runtime.stop();
  });

  it('shows a retained value only until a reading comes', async () => {
    const { runtime, source } = rig();
    runtime.start();
    source.sink!.stale(0, 500, 39);
    expect(runtime.posts[0]!.stale).toEqual({ time: 500, value: 39 });
    expect(runtime.readings).toBe(0);
    source.sink!.reading(0, 1000, 40);
    expect(runtime.posts[0]!.stale).toBeNull();
    await runtime.stop();
  });

  it('counts what was no reading and keeps a cleaned sample', async () => {
    const { runtime, source } = rig();
    runtime.start();
    source.sink!.fault('not-a-number', 'x\u001b[2J');
    source.sink!.fault('stale', 'retained');
    const [state] = runtime.sources;
    expect(state!.faultCount).toBe(1);
    expect(state!.samples.get('not-a-number')).toBe('x·[2J');
    await runtime.stop();
  });
});
