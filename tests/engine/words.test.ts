import { describe, expect, it } from 'vitest';
import { Channel } from '../../src/engine/channel.js';
import type { AlarmRaised } from '../../src/engine/events.js';
import { formatDuration, formatOdds, formatValue } from '../../src/engine/format.js';
import type { ChannelSpec } from '../../src/engine/spec.js';
import { spec } from './spec.js';

/** The sentence of the first alarm that the readings raise. */
function sentence(over: Partial<ChannelSpec>, values: readonly number[]): string {
  const channel = new Channel(spec({ band: { centre: 41.2, sigma: 0.31 }, resolution: 0.01, ...over }));
  const alarm = values.flatMap((value, i) => [...channel.take(i * 100, value)]).find((event) => event.event === 'raised');
  return (alarm as AlarmRaised).sentence;
}
const same = (value: number, n: number): number[] => Array.from({ length: n }, () => value);

describe('an alarm says in words', () => {
  it('how far a reading is out, and how seldom that is chance', () => {
    // Two-sided odds at 1.2 / 0.31 sigma: erfc(1.2 / 0.31 / sqrt(2)) = 1 / 9224.74 (mpmath).
    expect(sentence({ rules: ['one-beyond-3'] }, [42.4])).toBe(
      'flow is above its control limit 42.13 L/min: 42.40 L/min, +3.9 sigma from the centre 41.20 L/min (1 in 9 220).',
    );
  });

  it('that a run lies on one side', () => {
    expect(sentence({ rules: ['eight-one-side'] }, same(41.3, 8))).toBe(
      'The last 8 readings of flow all lie above the centre: it has shifted or drifts; now 41.30 L/min, +0.3 sigma from the centre 41.20 L/min (1 in 1.3).',
    );
  });

  it('that a sensor seems frozen, and how seldom noise alone does that', () => {
    // p = 2 Phi(0.01 / 0.62) - 1 = 0.01287; p^5 = 3.5e-10 is the first power below 1e-9.
    expect(sentence({ rules: [], frozen: true }, same(41.3, 12))).toBe(
      'flow has shown 41.30 L/min for 6 readings: noise alone would repeat it so 1 in 2.8e9; the sensor seems frozen.',
    );
  });

  it('that an instrument reports no number', () => {
    expect(sentence({}, [NaN])).toBe('flow reports not a number: the instrument cannot measure.');
  });

  it('that the work is outside its tolerance', () => {
    expect(sentence({ rules: [], tolerance: [38, 44] }, [44.5])).toMatch(
      /^flow is outside its tolerance of 38\.00 L\/min to 44\.00 L\/min: 44\.50 L\/min, \+10\.6 sigma/,
    );
  });
});

describe('numbers for people', () => {
  it.each([
    [0.0026997960632601866, '1 in 370'],
    [6.334248366623996e-5, '1 in 15 800'],
    [0.5, '1 in 2'],
    [1e-12, '1 in 1e12'],
    [0, 'next to none'],
  ])('odds of %d read %s', (p, text) => {
    expect(formatOdds(p)).toBe(text);
  });

  it.each([
    [42.4, 0.31, 0.01, '42.40'],
    [42.4, 0.31, null, '42.40'],
    [3.14159265, null, null, '3.14159'],
    [1234.5, 100, null, '1235'],
    [NaN, 1, null, 'not a number'],
    [1e12, 1, null, '1e12'],
  ])('%d with sigma %d and resolution %d reads %s', (value, sigma, resolution, text) => {
    expect(formatValue(value, sigma, resolution)).toBe(text);
  });

  it.each([
    [100, '100 ms'],
    [999.6, '1 s'],
    [5200, '5.2 s'],
    [59_960, '1 min'],
    [61_000, '1 min 1 s'],
    [7_200_000, '2 h'],
    [90_000_000, '1 d 1 h'],
  ])('%d ms read %s', (ms, text) => {
    expect(formatDuration(ms)).toBe(text);
  });
});
