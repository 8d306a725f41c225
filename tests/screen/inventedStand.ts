import { quantile, twoSided } from '../../src/stats/normal.js';
import type { Band } from '../../src/engine/band.js';
import type { AlarmView, ChannelView, StandView } from '../../src/screen/model.js';

/** A fixed moment, so that clocks and ages on the screen are known. */
export const NOW = Date.UTC(2031, 4, 7, 9, 41, 30);

/** An invented coolant-pump endurance cell: name, unit, centre, sigma, resolution. */
const QUANTITIES: readonly (readonly [channel: string, unit: string, centre: number, sigma: number, resolution: number])[] = [
  ['coolant-out', '°C', 82.4, 0.12, 0.01],
  ['coolant-in', '°C', 76.1, 0.1, 0.01],
  ['flow', 'L/min', 41.8, 0.35, 0.1],
  ['head-pressure', 'bar', 1.62, 0.008, 0.001],
  ['bearing-vibration', 'mm/s', 2.31, 0.09, 0.01],
  ['motor-current', 'A', 6.48, 0.04, 0.01],
];

/** Normal deviates that are the same on each run (Weyl sequence through the normal quantile). */
function deviates(seed: number): () => number {
  let state = (seed * 2654435761 + 12345) >>> 0;
  return () => {
    state = (Math.imul(state ^ (state >>> 15), 2246822519) + 3266489917) >>> 0;
    return quantile((state + 0.5) / 4294967296);
  };
}

export function band(centre: number, sigma: number, given: Partial<Band> = {}): Band {
  const n = 500;
  return {
    id: 'learned@499', origin: 'learned', centre, sigma, n, k: 3, low: centre - 3 * sigma, high: centre + 3 * sigma,
    centreUncertainty: sigma / Math.sqrt(n), sigmaUncertainty: sigma / Math.sqrt(2 * (n - 1)), ...given,
  };
}

/** @param slot place in the stand @param shift in sigmas, of the last tenth of the readings */
export function channel(slot: number, given: Partial<ChannelView> & { shift?: number; readings?: number } = {}): ChannelView {
  const { shift = 0, readings = 600, ...over } = given;
  const [name, unit, centre, sigma, resolution] = QUANTITIES[slot % QUANTITIES.length]!;
  const trend = new Float64Array(2000);
  const trendTimes = new Float64Array(2000);
  const next = deviates(slot + 1);
  const length = Math.min(readings, 2000);
  for (let i = 0; i < length; i++) {
    const z = Math.max(-2.9, Math.min(2.9, next())) + (i >= length * 0.9 ? shift : 0);
    trend[i] = Math.round((centre + sigma * z) / resolution) * resolution;
    trendTimes[i] = NOW - (length - 1 - i) * 200;
  }
  const value = length > 0 ? trend[length - 1]! : null;
  const z = value === null ? null : (value - centre) / sigma;
  const shown = trend.subarray(0, length);
  const mean = shown.reduce((a, b) => a + b, 0) / length;
  const sorted = shown.slice().sort();
  return {
    channel: slot < QUANTITIES.length ? name : `${name}-${String(slot + 1).padStart(3, '0')}`,
    unit, state: 'normal', settled: null, index: length - 1, time: NOW, value, stale: false, z,
    odds: z === null ? null : twoSided(z), band: band(centre, sigma), tolerance: null, resolution,
    trend, trendTimes, trendLength: length,
    window: length < 2 ? null : { n: length, mean, sd: sigma * 1.02, median: sorted[length >> 1]!, mad: 0.6745 * sigma, min: sorted[0]!, max: sorted[length - 1]! },
    lag1: 0.043, ...over,
  };
}

export function alarm(given: Partial<AlarmView> = {}): AlarmView {
  return {
    alarm: 'flow#1', channel: 'flow', detector: 'one-beyond-3', side: 'high', since: NOW - 72_000, signals: 4, odds: 1 / 370, clearedAt: null,
    sentence: 'flow is above its control limit 42.8 L/min: 43.3 L/min, +4.3 sigma from the centre 41.8 L/min (1 in 58 600).',
    ...given,
  };
}

/** A stand in which all is well, unless told otherwise. */
export function inventedStand(given: Partial<StandView> = {}, count = 6): StandView {
  return {
    stand: 'coolant pump cell 2', now: NOW, channels: Array.from({ length: count }, (_, slot) => channel(slot)),
    alarms: [], sources: [{ source: 'cell-bus', phase: 'open', sentence: 'open', faults: 0 }, { source: 'plc', phase: 'open', sentence: 'open', faults: 0 }],
    rate: 30, logTrouble: null, notice: null, ...given,
  };
}

/** The same with one channel in alarm, another that is settling, and a source that is lost. */
export function troubledStand(): StandView {
  const view = inventedStand();
  const channels = [...view.channels];
  channels[2] = channel(2, { shift: 4.3, state: 'alarm', tolerance: [39, 43.2] });
  channels[4] = channel(4, { state: 'settling', settled: [120, 500], band: null, z: null, odds: null, readings: 120 });
  return {
    ...view,
    channels,
    alarms: [
      alarm(),
      alarm({ alarm: 'flow#2', detector: 'eight-one-side', since: NOW - 31_000, odds: 1 / 256, sentence: 'The last 8 readings of flow all lie above the centre: it has shifted or drifts; now 43.3 L/min.' }),
      alarm({ alarm: 'coolant-in#1', channel: 'coolant-in', side: 'low', since: NOW - 900_000, clearedAt: NOW - 600_000, sentence: 'coolant-in is below its control limit 75.80 °C: 75.78 °C, -3.2 sigma from the centre 76.10 °C.' }),
    ],
    sources: [{ source: 'cell-bus', phase: 'open', sentence: 'open', faults: 3 }, { source: 'plc', phase: 'lost', sentence: '/dev/ttyUSB1 is not there; it is looked for every 2 s', faults: 0 }],
  };
}
