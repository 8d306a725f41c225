import { describe, expect, it } from 'vitest';
import { Channel } from '../../src/engine/channel.js';
import type { AlarmRaised, EngineEvent } from '../../src/engine/events.js';
import { spec } from './spec.js';

const feed = (channel: Channel, values: readonly number[], from = 0): EngineEvent[] => values.flatMap((value, i) => [...channel.take((from + i) * 100, value)]);
const of = (events: readonly EngineEvent[], kind: EngineEvent['event']): EngineEvent[] => events.filter(({ event }) => event === kind);
const raisedBy = (events: readonly EngineEvent[]): AlarmRaised[] => events.filter((event): event is AlarmRaised => event.event === 'raised');

describe('a band', () => {
  it('given as centre and sigma has its limits at k sigmas and no uncertainty', () => {
    expect(new Channel(spec({ k: 4 })).band).toMatchObject({ origin: 'given', centre: 40, sigma: 0.5, low: 38, high: 42, n: null, centreUncertainty: null });
  });

  it('learned has the mean, s / c4 and their standard uncertainties, then is frozen', () => {
    // The ten readings of the individuals example in the NIST/SEMATECH e-Handbook, 6.3.2.2 (from memory, see
    // tests/reference/charts.json): mean 50.81. sd by the definition; c4(10) = 0.9727 (ASTM MNL 7, from memory).
    const x = [49.6, 47.6, 49.9, 51.3, 47.8, 51.2, 52.6, 52.4, 53.6, 52.1];
    const channel = new Channel(spec({ band: { learn: 10 } }));
    const events = feed(channel, x);
    const sd = Math.sqrt(x.reduce((sum, v) => sum + (v - 50.81) ** 2, 0) / 9);
    const { band } = channel;
    expect(of(events, 'band')).toHaveLength(1);
    expect(band!.centre).toBeCloseTo(50.81, 12);
    expect(band!.sigma).toBeCloseTo(sd / 0.9726592741215883, 10);
    expect(band!.centreUncertainty).toBeCloseTo(sd / Math.sqrt(10), 12);
    expect(band).toMatchObject({ id: 'learned@9', n: 10, origin: 'learned' });
    feed(channel, Array<number>(200).fill(60), 10);
    expect(channel.band).toBe(band);
  });

  it('cannot be learned from one value without a known resolution; with one it is the spread of rounding', () => {
    const blind = new Channel(spec({ band: { learn: 20 } }));
    expect(of(feed(blind, Array<number>(20).fill(5)), 'band')).toMatchObject([{ band: null }]);
    expect(blind.settled).toEqual([0, 20]);
    const known = new Channel(spec({ band: { learn: 20 }, resolution: 0.1 }));
    feed(known, Array<number>(20).fill(5));
    expect(known.band!.sigma).toBeCloseTo(0.1 / Math.sqrt(12), 12);
  });
});

describe('inconsistent', () => {
  it('judges by xbar +- t s sqrt(1 + 1/n) at the level of k sigmas', () => {
    // t at the upper 0.5 % point with 9 degrees of freedom is 3.250 (any table, from memory); k = 2.5758 has the same level.
    const sigma = 1;
    const channel = new Channel(spec({ rules: ['inconsistent'], k: 2.5758293035489004, band: { centre: 0, sigma, n: 10 } }));
    const limit = 3.2498355440153697 * 0.9726592741215883 * Math.sqrt(1.1);
    expect(feed(channel, [limit - 1e-6])).toEqual([]);
    expect(raisedBy(feed(channel, [limit + 1e-6], 1))).toMatchObject([{ detector: 'inconsistent', side: 'high' }]);
  });

  it('is the limit of k sigmas where n is not known', () => {
    const channel = new Channel(spec({ rules: ['inconsistent'], band: { centre: 0, sigma: 1 } }));
    expect(feed(channel, [3])).toEqual([]);
    expect(raisedBy(feed(channel, [3.001], 1))).toHaveLength(1);
  });
});

describe('frozen', () => {
  it('signals once the run is less credible than its odds', () => {
    // r / sigma = 1: a reading repeats with p = 2 Phi(0.5) - 1 = 0.38292 (normal table); 0.38292^21 = 1.8e-9, ^22 = 6.8e-10.
    const channel = new Channel(spec({ rules: [], frozen: true, resolution: 0.5, band: { centre: 40, sigma: 0.5 } }));
    expect(feed(channel, Array<number>(22).fill(40))).toEqual([]); // 21 repeats
    const [alarm] = raisedBy(feed(channel, [40], 22));
    expect(alarm).toMatchObject({ detector: 'frozen', index: 22 });
    expect(alarm!.odds).toBeCloseTo(0.38292492254802624 ** 22, 15);
    expect(alarm!.sentence).toMatch(/for 23 readings/);
  });

  it('leaves a coarse instrument alone for as long as chance may hold it', () => {
    const channel = new Channel(spec({ rules: [], frozen: true, resolution: 3, band: { centre: 40, sigma: 0.5 } }));
    expect(feed(channel, Array<number>(2000).fill(39))).toEqual([]);
  });
});

describe('silent', () => {
  it('signals once per silence and clears with the next reading', () => {
    const channel = new Channel(spec({ rules: [], silentAfter: 500 }));
    channel.take(1000, 40);
    expect(channel.tick(1500)).toEqual([]);
    expect(raisedBy(channel.tick(1501))).toMatchObject([{ detector: 'silent', value: null, z: null }]);
    expect(channel.tick(9000)).toEqual([]);
    expect(of(channel.take(9100, 40), 'cleared')).toMatchObject([{ detector: 'silent', lasted: 7599 }]);
    expect(raisedBy(channel.tick(9700))).toHaveLength(1);
  });

  it('is told of a channel from which nothing ever came, from the first look on', () => {
    const channel = new Channel(spec({ rules: [], silentAfter: 500 }));
    expect(channel.tick(0)).toEqual([]);
    expect(raisedBy(channel.tick(501))).toHaveLength(1);
  });
});

describe('off-scale and tolerance', () => {
  it('NaN, infinities and values outside the range are off the scale and take part in no statistics', () => {
    const channel = new Channel(spec({ rules: ['one-beyond-3'], range: [0, 60] }));
    const events = feed(channel, [40, NaN, Infinity, 60.1, -0.1, 60]);
    expect(of(events, 'signal').map((event) => 'detector' in event && `${event.index} ${event.detector}`)).toEqual(['1 off-scale', '2 off-scale', '3 off-scale', '4 off-scale', '5 one-beyond-3']);
    expect(channel.statistics()).toMatchObject({ n: 2, min: 40, max: 60 });
    expect(channel.index).toBe(5);
  });

  it('a value on a line of the tolerance is inside it', () => {
    const channel = new Channel(spec({ rules: [], tolerance: [38, 42] }));
    expect(feed(channel, [38, 42])).toEqual([]);
    expect(raisedBy(feed(channel, [42.001], 2))).toMatchObject([{ detector: 'tolerance', side: 'high', evidence: { limits: { low: 38, high: 42 } } }]);
  });
});

describe('an alarm', () => {
  it('is raised at the first signal, carries the ones that recur, and clears after so many readings back', () => {
    const channel = new Channel(spec({ rules: ['one-beyond-3'], clearAfter: 3 }));
    const events = feed(channel, [42, 42, 40, 40, 42, 40, 40, 40]);
    expect(events.map((event) => `${event.event} ${event.index}`)).toEqual(['signal 0', 'raised 0', 'signal 1', 'signal 4', 'cleared 7']);
    expect(events.at(-1)).toMatchObject({ signals: 3, lasted: 700 });
  });

  it('has the same identifier whenever the same readings come, and evidence from which it can be worked out', () => {
    const [first, second] = [1, 2].map(() => raisedBy(feed(new Channel(spec({ rules: ['one-beyond-3'] })), [40, 40.2, 42]))[0]!);
    expect(first).toEqual(second);
    expect(first!.alarm).toBe('flow/one-beyond-3/19700101T000000200Z-2');
    expect(first!.evidence).toMatchObject({ band: { id: 'given', centre: 40, sigma: 0.5 }, limits: { scale: 1 } });
    expect(first!.evidence.readings).toEqual([
      { index: 0, time: 0, value: 40 },
      { index: 1, time: 100, value: 40.2 },
      { index: 2, time: 200, value: 42 },
    ]);
    expect(first!.odds).toBeCloseTo(6.334248366623985e-5, 15); // two-sided at z = 4, tests/reference/normal.json
  });
});

describe('a quiet reading', () => {
  it('gives always the same empty list', () => {
    const channel = new Channel(spec({ frozen: true, silentAfter: 500, tolerance: [30, 50], range: [0, 60], resolution: 0.01 }));
    const [a, b] = [channel.take(0, 40), channel.take(100, 40.1)];
    expect(a).toBe(b);
    expect(a).toEqual([]);
    expect(Object.isFrozen(a)).toBe(true);
  });

  it('leaves the state of a channel with a window of 500 within 8 kB', () => {
    expect(new Channel(spec({ window: 500 })).bytes).toBeLessThanOrEqual(8192);
  });
});
