import { normal } from './noise.js';
import { EVERY, faultAt, ROUND, type PlannedFault } from './schedule.js';

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

/** An endurance cell for coolant pumps. All of it is invented. */
export const INSTRUMENTS: readonly Instrument[] = [
  { channel: 'flow', unit: 'L/min', centre: 41.2, sigma: 0.31, resolution: 0.01, range: [0, 60] },
  { channel: 'inlet', unit: 'bar', centre: 1.18, sigma: 0.012, resolution: 0.001, range: [0, 4] },
  { channel: 'outlet', unit: 'bar', centre: 2.94, sigma: 0.021, resolution: 0.001, range: [0, 6] },
  { channel: 'bearing', unit: 'degC', centre: 63.4, sigma: 0.18, resolution: 0.01, range: [-40, 150] },
  { channel: 'vibration', unit: 'mm/s', centre: 2.35, sigma: 0.14, resolution: 0.01, range: [0, 25] },
  { channel: 'supply', unit: 'V', centre: 24.05, sigma: 0.06, resolution: 0.01, range: [0, 32] },
];


/** The number of an instrument in INSTRUMENTS; -1 where the cell has none of that name. */
export const instrumentAt = (channel: string): number => INSTRUMENTS.findIndex((instrument) => instrument.channel === channel);

/**
 * The reading of instrument `i` at a step; null where it sends none. The same seed gives the same run, always.
 * @param step from 0, EVERY ms apart
 * @param faults whether the schedule of faults is in force
 */
export function readingAt(seed: number, i: number, step: number, faults: boolean): number | null {
  const instrument = INSTRUMENTS[i]!;
  const fault = faults ? faultAt(step) : null;
  if (fault?.channel !== instrument.channel) return round(healthyAt(seed, i, step), instrument.resolution);
  const since = (step % ROUND) - fault.from;
  return faulty(instrument, fault, since, healthyAt(seed, i, step), healthyAt(seed, i, step - since - 1));
}

function healthyAt(seed: number, i: number, step: number): number {
  const { centre, sigma } = INSTRUMENTS[i]!;
  return centre + sigma * normal(seed, i, step);
}

/** @param since steps since the fault began. @param healthy what it would show. @param last what it showed before the fault */
function faulty({ centre, sigma, resolution }: Instrument, { kind }: PlannedFault, since: number, healthy: number, last: number): number | null {
  const seconds = (since * EVERY) / 1000;
  switch (kind) {
    case 'step':
      return round(healthy - 2, resolution);
    case 'drift':
      return round(healthy + 0.1 * seconds, resolution);
    case 'noise':
      return round(centre + (healthy - centre) * (1 + seconds / 3), resolution);
    case 'frozen':
      return round(last, resolution);
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
