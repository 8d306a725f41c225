import { describe, expect, it } from 'vitest';
import { HEALTH_DETECTORS, RULES, type Detector } from '../../src/engine/rules.js';
import type { ChannelSpec } from '../../src/engine/spec.js';
import { keepsTheContract, type Scene, type Step } from './detector.contract.js';
import { deviates, quiet } from './series.js';
import { spec } from './spec.js';

const CENTRE = 40;
const SIGMA = 0.5;

/** Readings of the given deviations, 100 ms apart. */
const readings = (z: readonly number[]): Step[] => z.map((each, i) => [i * 100, CENTRE + SIGMA * each]);

/** Quiet readings, then these, then quiet ones until every alarm has cleared. */
const amid = (z: readonly number[]): Step[] => readings([...quiet(40), ...z, ...quiet(40)]);
const later = (steps: readonly Step[], by: number): Step[] => steps.map(([time, value]) => [time + by, value]);
const times = (n: number, value: number): number[] => Array.from({ length: n }, () => value);

const scene = (detector: Detector, steps: Step[], over: Partial<ChannelSpec> = {}): Scene => ({
  detector,
  spec: spec({ band: { centre: CENTRE, sigma: SIGMA }, rules: RULES.filter((each) => each === detector), ...over }),
  steps,
});

const SCENES: readonly Scene[] = [
  scene('one-beyond-3', amid([3.5, 0, -4, 0.1])),
  scene('two-of-three-beyond-2', amid([2.5, 0, 2.2])),
  scene('four-of-five-beyond-1', amid([-1.5, -1.2, 0, -1.1, -1.9])),
  scene('eight-one-side', amid(times(9, 0.5))),
  scene('nine-one-side', amid(times(10, -0.5))),
  scene('trend-of-6', amid([-1.5, -1, -0.5, 0, 0.5, 1, 1.5])),
  scene('alternating-14', amid(Array.from({ length: 15 }, (_, i) => (i % 2 === 0 ? 1 : -1) * (0.5 + i / 100)))),
  scene('fifteen-within-1', amid(Array.from({ length: 17 }, (_, i) => (i % 3) / 10 - 0.1))),
  scene('eight-outside-1', amid([1.5, -1.5, 1.6, -1.7, -1.2, 1.3, 1.4, -1.9, 1.2])),
  scene('inconsistent', amid([4.5, 0, -5]), { band: { centre: CENTRE, sigma: SIGMA, n: 12 } }),
  scene('frozen', amid(times(30, 0.4)), { frozen: true, resolution: 0.05 }),
  scene('silent', [[0, 40], [100, 40.2], [300, 'tick'], [2200, 'tick'], [2300, 'tick'], [9000, 40.1]], { silentAfter: 2000 }),
  scene('off-scale', [...amid([]), ...later([[0, NaN], [100, 61], [200, -1], ...readings(quiet(20))], 8000)], { range: [0, 60] }),
  scene('tolerance', amid([5, 6, -7]), { tolerance: [38, 42] }),
];

describe('every detector', () => {
  it('has its scene here', () => {
    expect(SCENES.map(({ detector }) => detector)).toEqual([...RULES, ...HEALTH_DETECTORS]);
  });
  SCENES.forEach(keepsTheContract);
});

describe('a stretched run of forty, longer than evidence usually reaches', () => {
  keepsTheContract(scene('eight-one-side', amid(times(42, 0.1)), { sideRun: 40 }));
});

describe('all detectors at once on noise, with a learned band and readings off the scale among the others', () => {
  const values = deviates(1200, 7).map((z, i) => CENTRE + SIGMA * (i < 700 ? z : i < 800 ? z + 2.5 : 3 * z));
  values.fill(values[1000]!, 1000, 1050);
  for (let i = 710; i < 1200; i += 7) values[i] = i % 2 ? NaN : 99;
  const steps: Step[] = values.map((value, i) => [i * 100, Math.round(value * 100) / 100]);
  keepsTheContract({
    detector: 'eight-one-side',
    spec: spec({ band: { learn: 300 }, rules: RULES, frozen: true, range: [0, 60], tolerance: [38, 42], silentAfter: 1000 }),
    steps: [...steps, ...later(readings(quiet(60)), 120_000)],
  });
});
