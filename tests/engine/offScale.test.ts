import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { Channel } from '../../src/engine/channel.js';
import { RULES } from '../../src/engine/rules.js';
import { spec } from './spec.js';

describe('a reading off the scale', () => {
  it.each([
    [NaN, null, null],
    [Infinity, 'high', null],
    [-Infinity, 'low', null],
    [60.5, 'high', 60.5],
    [-0.5, 'low', -0.5],
  ])('%d is found, on the side %s', (value, side, told) => {
    const events = new Channel(spec({ range: [0, 60] })).take(0, value);
    expect(events[1]).toMatchObject({ event: 'raised', detector: 'off-scale', side, value: told, z: null, odds: null });
    expect(events[1]).toMatchObject({ evidence: { readings: [{ index: 0, time: 0, value }] } });
  });

  it('is one that is infinite even where no range is known', () => {
    expect(new Channel(spec()).take(0, Infinity)[1]).toMatchObject({ detector: 'off-scale', side: 'high' });
  });

  it('counts, but is no part of the baseline', () => {
    const channel = new Channel(spec({ band: { learn: 3 }, range: [0, 60] }));
    [10, NaN, 1e9, 12].forEach((value, i) => channel.take(i, value));
    expect(channel.settled).toEqual([2, 3]);
    channel.take(4, 14);
    expect(channel.band).toMatchObject({ id: 'learned@4', centre: 12, n: 3 });
  });

  it('is to every rule as if it were missing', () => {
    const quarters = fc.array(fc.integer({ min: -16, max: 16 }), { minLength: 1, maxLength: 120 });
    const signals = (z: readonly number[], missing: boolean): string[] => {
      const channel = new Channel(spec({ band: { centre: 0, sigma: 4, n: 30 }, rules: RULES }));
      return z.flatMap((value, i) => {
        if (missing) channel.take(i, NaN);
        return channel.take(i, value).flatMap((event) => (event.event === 'signal' ? [`${i} ${event.detector} ${event.side ?? '-'}`] : []));
      });
    };
    fc.assert(
      fc.property(quarters, (z) => {
        expect(signals(z, true)).toEqual(signals(z, false));
      }),
      { seed: 14, numRuns: 100 },
    );
  });
});

describe('a reading outside its tolerance', () => {
  it('is judged by the band as well', () => {
    const channel = new Channel(spec({ tolerance: [38, 44], rules: ['one-beyond-3'] }));
    const found = channel.take(1, 44.1).flatMap((event) => (event.event === 'signal' ? [`${event.detector} ${event.side ?? ''}`] : []));
    expect(found).toEqual(['one-beyond-3 high', 'tolerance high']);
  });

  it('is found while the channel settles', () => {
    const channel = new Channel(spec({ tolerance: [38, 44], band: { learn: 100 } }));
    expect(channel.take(0, 37.9)[1]).toMatchObject({ detector: 'tolerance', side: 'low', z: null, odds: null, evidence: { band: null } });
  });
});
