import { normal } from './noise.js';

/** One instrument of the simulated coolant-pump cell: what it shows while nothing is wrong. */
export interface Instrument {
  readonly channel: string;
  readonly unit: string;
  readonly centre: number;
  readonly sigma: number;
  /** What it rounds to. */
  readonly resolution: number;
  /** What it can report. */
  readonly range: readonly [number, number];
}

/** Readings lie this far apart, ms. */
export const EVERY = 100;

/** An endurance cell for coolant pumps. All of it is invented. */
export const INSTRUMENTS: readonly Instrument[] = [
  { channel: 'flow', unit: 'L/min', centre: 41.2, sigma: 0.31, resolution: 0.01, range: [0, 60] },
  { channel: 'inlet', unit: 'bar', centre: 1.18, sigma: 0.012, resolution: 0.001, range: [0, 4] },
  { channel: 'outlet', unit: 'bar', centre: 2.94, sigma: 0.021, resolution: 0.001, range: [0, 6] },
  { channel: 'bearing', unit: 'degC', centre: 63.4, sigma: 0.18, resolution: 0.01, range: [-40, 150] },
  { channel: 'vibration', unit: 'mm/s', centre: 2.35, sigma: 0.14, resolution: 0.01, range: [0, 25] },
  { channel: 'supply', unit: 'V', centre: 24.05, sigma: 0.06, resolution: 0.01, range: [0, 32] },
];

export type FaultKind = 'step' | 'drift' | 'noise' | 'frozen' | 'silence' | 'spike' | 'coarse';

/** One fault of the schedule; steps of EVERY ms, counted from the start of a round. */
export interface PlannedFault {
  readonly kind: FaultKind;
  readonly channel: string;
  readonly from: number;
  readonly to: number;
  /** What is wrong, in plain words. */
  readonly sentence: string;
}

const SECOND = 1000 / EVERY;
const planned = (kind: FaultKind, channel: string, from: number, lasts: number, sentence: string): PlannedFault => ({
  kind,
  channel,
  from: from * SECOND,
  to: (from + lasts) * SECOND,
  sentence,
});

/** Each channel settles during the first 20 s. Then one fault at a time, with quiet in between; and round again. */
export const SETTLING = 200;
export const ROUND = 210 * SECOND;
export const SCHEDULE: readonly PlannedFault[] = [
  planned('step', 'flow', 30, 15, 'a valve has closed a little: flow is 2 L/min lower'),
  planned('drift', 'bearing', 55, 25, 'the bearing runs dry: its temperature climbs 0.1 degC a second'),
  planned('noise', 'vibration', 90, 18, 'a bolt works loose: vibration grows noisy'),
  planned('frozen', 'outlet', 118, 12, 'the outlet sensor is frozen: it repeats its last value'),
  planned('silence', 'supply', 138, 10, 'the supply meter is unplugged: nothing comes from it'),
  planned('spike', 'inlet', 156, 0.1, 'an air bubble: the inlet pressure spikes for one reading'),
  planned('coarse', 'flow', 170, 20, 'the flow meter has lost digits: it shows whole litres only'),
];

/** The fault at a step; null while nothing is wrong. Rounds repeat after the settling of the first. */
export function faultAt(step: number): PlannedFault | null {
  const inRound = step % ROUND;
  return SCHEDULE.find(({ from, to }) => inRound >= from && inRound < to) ?? null;
}

/**
 * The reading of instrument `i` at a step; null where it sends none.
 * @param faults whether the schedule of faults is in force
 */
export function readingAt(seed: number, i: number, step: number, faults: boolean): number | null {
  const instrument = INSTRUMENTS[i]!;
  const { centre, sigma, resolution } = instrument;
  const fault = faults ? faultAt(step) : null;
  const healthy = centre + sigma * normal(seed, i, step);
  if (fault?.channel !== instrument.channel) return round(healthy, resolution);
  const since = (step % ROUND) - fault.from;
  switch (fault.kind) {
    case 'step':
      return round(healthy - 2, resolution);
    case 'drift':
      return round(healthy + (0.1 * since) / SECOND, resolution);
    case 'noise':
      return round(centre + sigma * (1 + since / (3 * SECOND)) * normal(seed, i, step), resolution);
    case 'frozen':
      return round(centre + sigma * normal(seed, i, step - since), resolution);
    case 'silence':
      return null;
    case 'spike':
      return round(healthy + 12 * sigma, resolution);
    case 'coarse':
      return round(healthy, 1);
  }
}

/** To the nearest multiple of the resolution, without a tail of binary digits. */
function round(value: number, resolution: number): number {
  const digits = Math.max(0, Math.round(-Math.log10(resolution)));
  return Number((Math.round(value / resolution) * resolution).toFixed(digits));
}
