import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { Channel } from '../../src/engine/channel.js';
import type { AlarmRaised, EngineEvent } from '../../src/engine/events.js';
import { recompute } from '../../src/engine/recompute.js';
import type { Detector } from '../../src/engine/rules.js';
import type { ChannelSpec } from '../../src/engine/spec.js';
import { twoSided } from '../../src/stats/normal.js';
import { quiet } from './series.js';

/** One thing that happens to a channel: a reading, or a look at the clock. */
export type Step = readonly [time: number, value: number | 'tick'];

/** A channel and what happens to it, on which the detector must signal. */
export interface Scene {
  readonly detector: Detector;
  readonly spec: ChannelSpec;
  readonly steps: readonly Step[];
}

const play = (channel: Channel, steps: readonly Step[]): EngineEvent[] =>
  steps.flatMap(([time, value]) => [...(value === 'tick' ? channel.tick(time) : channel.take(time, value))]);

const raisedBy = (events: readonly EngineEvent[], detector: Detector): AlarmRaised[] =>
  events.filter((event): event is AlarmRaised => event.event === 'raised' && event.detector === detector);

/** What every detector keeps, whatever it detects. */
export function keepsTheContract({ detector, spec, steps }: Scene): void {
  describe(detector, () => {
    const live = play(new Channel(spec), steps);

    it('signals, raises one alarm before anything else of it, and clears it at the end', () => {
      const own = live.filter((event) => event.event !== 'band' && event.detector === detector);
      expect(own.map(({ event }) => event).slice(0, 2)).toEqual(['signal', 'raised']);
      expect(raisedBy(live, detector).length).toBeGreaterThan(0);
      let standing = 0;
      for (const { event } of own) {
        if (event === 'raised') expect(++standing).toBe(1);
        if (event === 'cleared') expect(--standing).toBe(0);
      }
      expect(standing).toBe(0);
    });

    it('gives the same events again', () => {
      expect(play(new Channel(spec), steps)).toEqual(live);
    });

    it('gives the same events after a restart from a snapshot, wherever it is taken', () => {
      fc.assert(
        fc.property(fc.integer({ min: 0, max: steps.length }), fc.integer({ min: 0, max: steps.length }), (a, b) => {
          const [first, second] = a < b ? [a, b] : [b, a];
          let channel = new Channel(spec);
          const events: EngineEvent[] = [];
          for (const [from, to] of [
            [0, first],
            [first, second],
            [second, steps.length],
          ] as const) {
            events.push(...play(channel, steps.slice(from, to)));
            channel = Channel.restore(spec, JSON.parse(JSON.stringify(channel.snapshot())) as ReturnType<Channel['snapshot']>);
          }
          expect(events).toEqual(live);
        }),
        { seed: 5, numRuns: 25, examples: [[0, 0], [steps.length, steps.length]] },
      );
    });

    it('raises alarms that recompute from their evidence', () => {
      for (const alarm of live) if (alarm.event === 'raised') expect(recompute(alarm), alarm.sentence).toBe(true);
    });

    it('raises alarms that do not recompute from quiet evidence', () => {
      for (const alarm of raisedBy(live, detector)) {
        const { band, limits } = alarm.evidence;
        const { centre, sigma } = band ?? { centre: 40, sigma: 0.5 };
        const readings = quiet(alarm.evidence.readings.length).map((z) => ({ value: centre + sigma * z }));
        const value = readings.at(-1)!.value;
        const z = (value - centre) / sigma;
        const claim = { ...alarm, value, z, odds: twoSided(z), evidence: { band, limits: { ...limits, silence: 1 }, readings } };
        expect(recompute(claim)).toBe(false);
      }
    });

    it('raises alarms that do not recompute once their value or side is altered', () => {
      for (const alarm of raisedBy(live, detector)) {
        if (detector !== 'silent') expect(recompute({ ...alarm, value: 40.123 })).toBe(false);
        if (alarm.side !== null) expect(recompute({ ...alarm, side: alarm.side === 'high' ? 'low' : 'high' })).toBe(false);
      }
    });

    it('says in a sentence which channel it is', () => {
      for (const alarm of raisedBy(live, detector)) expect(alarm.sentence).toMatch(/\bflow\b.*\.$/);
    });
  });
}
