import { performance } from 'node:perf_hooks';
import { setTimeout as sleep } from 'node:timers/promises';
import { describe, expect, it } from 'vitest';
import type { SimulatedOptions } from '../../adapters/options.js';
import { instrumentAt, readingAt } from '../../adapters/simulated/cell.js';
import { EVERY } from '../../adapters/simulated/schedule.js';
import { simulatedSource } from '../../adapters/simulated/source.js';
import type { Wanted } from '../../adapters/source.js';
import { UserError } from '../../src/text/errors.js';
import { RecordingSink, until } from './recordingSink.js';
import { describeSource } from './source.contract.js';

const wanted = (...fields: string[]): Wanted[] =>
  fields.map((field, slot) => ({ slot, channel: `channel ${slot}`, field, topic: null, value: null, time: null, sequence: null, every: null }));
const options = (speed: number, faults = false): SimulatedOptions => ({ seed: 1, faults, speed });

for (const [name, speed] of [
  ['simulated, as fast as it goes,', 0],
  ['simulated, two hundred times as fast,', 200],
] as const)
  describeSource(name, () =>
    Promise.resolve({
      source: simulatedSource('cell', options(speed), wanted('flow')),
      made: (k: number) => readingAt(1, instrumentAt('flow'), k, false)!,
      feed: () => Promise.resolve(), // it makes its own
      dispose: () => Promise.resolve(),
    }),
  );

describe('the simulated source', () => {
  it('has the instruments flow, inlet, outlet, bearing, vibration and supply, and says so where another is asked for', () => {
    expect(() => simulatedSource('cell', options(0), wanted('flow', 'inlet', 'outlet', 'bearing', 'vibration', 'supply'))).not.toThrow();
    const wrong = (): unknown => simulatedSource('cell', options(0), wanted('pressure\u001b[2J'));
    expect(wrong).toThrow(UserError);
    expect(wrong).toThrow("no instrument 'pressure·[2J'. It has: flow, inlet, outlet, bearing, vibration, supply.");
  });

  it('keeps real time: ten readings a second, none late or early by more than the clock of the machine', async () => {
    const sink = new RecordingSink();
    const source = simulatedSource('cell', options(1), wanted('flow'));
    const began = performance.now();
    source.start(sink);
    await until(() => sink.readings.length >= 8, 'eight readings have come');
    expect(performance.now() - began).toBeGreaterThanOrEqual(7 * EVERY - 20);
    await source.stop();
  });

  it('spaces its times by 100 ms where it goes as fast as it can, silences left out', async () => {
    const sink = new RecordingSink();
    const source = simulatedSource('cell', options(0, true), wanted('supply', 'flow'));
    source.start(sink);
    await until(() => sink.values(1).length >= 1700, 'a silence has passed');
    await source.stop();
    const times = (slot: number): number[] => sink.readings.filter((reading) => reading.slot === slot).map(({ time }) => time);
    const steps = (slot: number): Set<number> => new Set(times(slot).slice(1).map((time, i) => time - times(slot)[i]!));
    expect(steps(1)).toEqual(new Set([EVERY]));
    expect(steps(0)).toEqual(new Set([EVERY, 12_000 + EVERY]));
  });

  it('leaves the event loop its turns, and stops at once, at any speed', async () => {
    for (const speed of [0, 1, 1e9]) {
      const sink = new RecordingSink();
      const source = simulatedSource('cell', options(speed), wanted('flow'));
      source.start(sink);
      await sleep(30);
      const began = performance.now();
      await source.stop();
      expect(performance.now() - began).toBeLessThan(500);
      expect(sink.readings.length).toBeGreaterThan(0);
    }
  });
});
