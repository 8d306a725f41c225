import { describe, expect, it } from 'vitest';
import { INSTRUMENTS, instrumentAt, readingAt } from '../../adapters/simulated/cell.js';
import { normal, uniform } from '../../adapters/simulated/noise.js';
import { EVERY, faultAt, faultToTell, ROUND, SCHEDULE, SETTLING, type FaultKind } from '../../adapters/simulated/schedule.js';
import { cdf } from '../../src/stats/normal.js';

const N = 100_000;
const deviates = (seed: number, stream: number): Float64Array => Float64Array.from({ length: N }, (_, step) => normal(seed, stream, step));
const mean = (x: ArrayLike<number>): number => Array.from(x).reduce((a, b) => a + b, 0) / x.length;

/** Correlation of two rows of standard normal deviates, the second moved by a lag. Its standard error is 1/sqrt(n). */
function correlation(a: Float64Array, b: Float64Array, lag = 0): number {
  let sum = 0;
  for (let i = lag; i < N; i++) sum += a[i - lag]! * b[i]!;
  return sum / (N - lag);
}

const FIVE = 5 / Math.sqrt(N); // five standard errors

/** Readings of a fault's channel over the fault, and of the healthy cell over the same steps. */
function during(kind: FaultKind): { ill: (number | null)[]; well: number[]; sigma: number; before: number | null } {
  const fault = SCHEDULE.find((planned) => planned.kind === kind)!;
  const i = instrumentAt(fault.channel);
  const steps = Array.from({ length: fault.to - fault.from }, (_, k) => fault.from + k);
  return {
    ill: steps.map((step) => readingAt(1, i, step, true)),
    well: steps.map((step) => readingAt(1, i, step, false)!),
    sigma: INSTRUMENTS[i]!.sigma,
    before: readingAt(1, i, fault.from - 1, true),
  };
}

describe("the cell's noise", () => {
  it.each([1, 2, 12345, -7])('is standard normal with seed %i: mean, variance, and the greatest distance from Phi (Kolmogorov)', (seed) => {
    const x = deviates(seed, 3);
    expect(Math.abs(mean(x))).toBeLessThan(FIVE);
    expect(Math.abs(mean(x.map((z) => z * z)) - 1)).toBeLessThan(FIVE * Math.SQRT2);
    const distance = Math.max(...x.toSorted().map((z, i) => Math.abs(cdf(z) - (i + 0.5) / N)));
    expect(distance * Math.sqrt(N)).toBeLessThan(1.95); // p = 0.001 (Smirnov, Ann. Math. Stat. 19, 1948)
  });

  it('is unlike from reading to reading, from channel to channel and from seed to seed', () => {
    const x = deviates(1, 0);
    for (const lag of [1, 2, 3, 10]) expect(Math.abs(correlation(x, x, lag))).toBeLessThan(FIVE);
    for (const stream of [1, 2, 3, 4, 5]) expect(Math.abs(correlation(x, deviates(1, stream)))).toBeLessThan(FIVE);
    for (const seed of [0, 2, 3, 257]) expect(Math.abs(correlation(x, deviates(seed, 0)))).toBeLessThan(FIVE);
  });

  it('never makes 0 or 1 of its uniform deviates', () => {
    for (let step = 0; step < N; step++) {
      const u = uniform(9, 0, step);
      expect(u > 0 && u < 1).toBe(true);
    }
  });
});

describe('the simulated cell', () => {
  it('gives the same run for the same seed, another for another', () => {
    const run = (seed: number): (number | null)[] => Array.from({ length: 500 }, (_, step) => readingAt(seed, 0, step, true));
    expect(run(4)).toEqual(run(4));
    expect(run(4)).not.toEqual(run(5));
  });

  it('rounds to the resolution of each instrument, and stays within its range', () => {
    for (const [i, { resolution, range }] of INSTRUMENTS.entries())
      for (let step = 0; step < ROUND; step++) {
        const value = readingAt(1, i, step, true);
        if (value === null) continue;
        expect(Math.abs(value / resolution - Math.round(value / resolution))).toBeLessThan(1e-6);
        expect(String(value).length).toBeLessThanOrEqual(6);
        expect(value > range[0] && value < range[1]).toBe(true);
      }
  });

  it('is well while it settles, and where the faults are off', () => {
    for (let step = 0; step < SETTLING; step++) expect(faultAt(step)).toBeNull();
    for (let step = 0; step < ROUND; step++) expect(readingAt(1, 5, step, false)).not.toBeNull();
  });

  it('has each kind of fault once in a round, one at a time, on five channels at least, for all rounds', () => {
    expect(new Set(SCHEDULE.map(({ kind }) => kind)).size).toBe(SCHEDULE.length);
    expect(SCHEDULE).toHaveLength(7);
    expect(new Set(SCHEDULE.map(({ channel }) => channel)).size).toBeGreaterThanOrEqual(5);
    for (const [i, { from, to }] of SCHEDULE.entries()) {
      expect(to).toBeGreaterThan(from);
      expect(SCHEDULE[i + 1]?.from ?? ROUND).toBeGreaterThan(to);
      expect(faultAt(from + 3 * ROUND)).toBe(SCHEDULE[i]);
    }
  });

  it('says a fault as long as it lasts, and six seconds at least', () => {
    for (const { from, to, sentence } of SCHEDULE)
      for (let step = from; step < Math.max(to, from + 6000 / EVERY); step++) expect(faultToTell(step)?.sentence).toBe(sentence);
    expect(faultToTell(SCHEDULE[0]!.from - 1)).toBeNull();
  });

  it('steps by 2 L/min, and drifts by 0.1 degC a second', () => {
    const step = during('step');
    for (const [k, value] of step.ill.entries()) expect(value! - step.well[k]!).toBeCloseTo(-2, 6);
    const drift = during('drift');
    for (const [k, value] of drift.ill.entries()) expect(Math.abs(value! - drift.well[k]! - (0.1 * k * EVERY) / 1000)).toBeLessThanOrEqual(0.0101);
  });

  it('grows noisy, freezes at its last value, falls silent, spikes once, loses its decimals', () => {
    const rms = (x: readonly number[]): number => Math.sqrt(mean(x.map((value) => (value - 2.35) ** 2)));
    const noise = during('noise').ill as number[];
    expect(rms(noise.slice(-60))).toBeGreaterThan(3 * rms(noise.slice(0, 60)));
    const frozen = during('frozen');
    expect(new Set(frozen.ill)).toEqual(new Set([frozen.before]));
    expect(new Set(during('silence').ill)).toEqual(new Set([null]));
    const { ill, well, sigma } = during('spike');
    expect(ill).toHaveLength(1);
    expect(ill[0]! - well[0]!).toBeCloseTo(12 * sigma, 3);
    expect(during('coarse').ill.every(Number.isInteger)).toBe(true);
  });
});
