import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { Channel } from '../../src/engine/channel.js';
import type { EngineEvent } from '../../src/engine/events.js';
import { RULES } from '../../src/engine/rules.js';
import type { ChannelSnapshot } from '../../src/engine/snapshot.js';
import type { ChannelSpec } from '../../src/engine/spec.js';
import { spec } from './spec.js';

/** A reading at a time, or only the time. */
type Step = readonly [time: number, value: number | null];

const apply = (channel: Channel, [time, value]: Step): readonly EngineEvent[] => (value === null ? channel.tick(time) : channel.take(time, value));

/** Noise with everything in it that a detector may find: steps, drifts, freezes, silences, wild values. */
function hardTimes(seed: number, n: number): Step[] {
  let state = seed >>> 0;
  const uniform = (): number => ((state = (Math.imul(state, 1664525) + 1013904223) >>> 0) + 0.5) / 2 ** 32;
  const normal = (): number => Math.sqrt(-2 * Math.log(uniform())) * Math.cos(2 * Math.PI * uniform());
  const steps: Step[] = [];
  let [time, shift, frozen] = [1000, 0, 0];
  let value = 40;
  for (let i = 0; i < n; i++) {
    time += 100;
    const luck = uniform();
    if (luck < 0.01) shift = 4 * (uniform() - 0.5);
    else if (luck < 0.02) frozen = 12;
    else if (luck < 0.03) steps.push([(time += 3000), null]);
    else if (luck < 0.035) {
      steps.push([time, [NaN, Infinity, 99, -Infinity][i % 4]!]);
      continue;
    }
    if (frozen > 0) frozen--;
    else value = Math.round((40 + shift + 0.5 * normal()) * 100) / 100;
    steps.push([time, value]);
  }
  return steps;
}

const KINDS: Readonly<Record<string, Partial<ChannelSpec>>> = {
  ...Object.fromEntries(RULES.map((rule) => [rule, { rules: [rule], band: { centre: 40, sigma: 0.5, n: 60 } }])),
  frozen: { rules: [], frozen: true, resolution: 0.01 },
  'frozen, resolution not known': { rules: [], frozen: true },
  silent: { rules: [], silentAfter: 500 },
  'off-scale': { rules: [], range: [0, 60] },
  tolerance: { rules: [], tolerance: [39, 41] },
  'all at once, settling first': { rules: RULES, frozen: true, silentAfter: 500, range: [0, 60], tolerance: [38, 42], band: { learn: 50 } },
};

describe.each(Object.entries(KINDS))('%s', (_name, over) => {
  it('gives the same events live, replayed, and restored from a snapshot at any reading', () => {
    const watched = spec(over);
    let found = 0;
    fc.assert(
      fc.property(fc.integer({ min: 1, max: 1e6 }), fc.array(fc.nat(399), { minLength: 1, maxLength: 4 }), (seed, cuts) => {
        const steps = hardTimes(seed, 400);
        const live = new Channel(watched);
        const expected = steps.map((step) => apply(live, step));
        found += expected.flat().length;
        let restored = new Channel(watched);
        steps.forEach((step, i) => {
          expect(apply(restored, step)).toEqual(expected[i]);
          if (cuts.includes(i)) restored = Channel.restore(watched, JSON.parse(JSON.stringify(restored.snapshot())) as ChannelSnapshot);
        });
        expect(restored.statistics()).toEqual(live.statistics());
        expect(restored.mean()).toBe(live.mean());
        expect(restored.snapshot()).toEqual(live.snapshot());
      }),
      { seed: 5, numRuns: 12 },
    );
    expect(found).toBeGreaterThan(0); // the hard times were hard enough for this detector
  });
});

describe('a snapshot', () => {
  it('of another specification or version is refused', () => {
    const snapshot = new Channel(spec()).snapshot();
    expect(() => Channel.restore(spec({ k: 4 }), snapshot)).toThrow(/another specification/);
    expect(() => Channel.restore(spec(), { ...snapshot, version: 2 as 1 })).toThrow(/version/);
  });
});

const signals = (channel: Channel, values: readonly number[]): string[] =>
  values.flatMap((value, i) => channel.take(i * 100, value).flatMap((event) => (event.event === 'signal' ? [`${event.index} ${event.detector} ${event.side}`] : [])));

describe('laws of the rules', () => {
  // Powers of two and whole offsets, so that the readings scale without rounding.
  const walk = fc.array(fc.integer({ min: -4000, max: 4000 }), { minLength: 20, maxLength: 200 });

  it('shift and scale of the readings and the band together change nothing', () => {
    fc.assert(
      fc.property(walk, fc.integer({ min: -1000, max: 1000 }), fc.constantFrom(0.25, 0.5, 2, 8), (readings, shift, scale) => {
        const plain = new Channel(spec({ rules: RULES, band: { centre: 0, sigma: 1024 } }));
        const moved = new Channel(spec({ rules: RULES, band: { centre: shift, sigma: 1024 * scale } }));
        expect(signals(moved, readings.map((x) => x * scale + shift))).toEqual(signals(plain, readings));
      }),
      { seed: 3 },
    );
  });

  it('readings mirrored at the centre signal on the other side', () => {
    const mirrored = (text: string): string => text.replace(/high|low/, (side) => (side === 'high' ? 'low' : 'high'));
    fc.assert(
      fc.property(walk, (readings) => {
        const band = { centre: 0, sigma: 1024 };
        const there = signals(new Channel(spec({ rules: RULES, band })), readings);
        const here = signals(new Channel(spec({ rules: RULES, band })), readings.map((x) => -x));
        expect(here).toEqual(there.map(mirrored));
      }),
      { seed: 4 },
    );
  });
});
