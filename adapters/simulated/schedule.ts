/** Readings lie this far apart, ms. */
export const EVERY = 100;

export type FaultKind = 'step' | 'drift' | 'noise' | 'frozen' | 'silence' | 'spike' | 'coarse';

/** One fault of the schedule; steps of EVERY ms, counted from the start of a round. */
export interface PlannedFault {
  readonly kind: FaultKind;
  readonly channel: string;
  readonly from: number;
  /** The first step at which all is well again. */
  readonly to: number;
  /** What is wrong, in plain words. */
  readonly sentence: string;
}

const SECOND = 1000 / EVERY;
const SAID_FOR = 6 * SECOND; // a fault of one reading is named long enough to be read

const planned = (kind: FaultKind, channel: string, from: number, lasts: number, sentence: string): PlannedFault => ({
  kind,
  channel,
  from: Math.round(from * SECOND),
  to: Math.round((from + lasts) * SECOND),
  sentence,
});

/** Steps in which each channel settles, before the first fault. */
export const SETTLING = 20 * SECOND;

/** Steps after which the schedule begins again. */
export const ROUND = 210 * SECOND;

/** One fault at a time, on one channel after the other, with quiet in between; times in seconds. */
export const SCHEDULE: readonly PlannedFault[] = [
  planned('step', 'flow', 30, 15, 'a valve has closed a little: flow is 2 L/min lower'),
  planned('drift', 'bearing', 58, 20, 'the bearing runs dry: its temperature climbs 0.1 degC a second'),
  planned('noise', 'vibration', 90, 18, 'a bolt works loose: vibration grows noisy'),
  planned('frozen', 'outlet', 120, 15, 'the outlet sensor is frozen: it repeats its last value'),
  planned('silence', 'supply', 147, 12, 'the supply meter is unplugged: nothing comes from it'),
  planned('spike', 'inlet', 170, 1 / SECOND, 'an air bubble: the inlet pressure has spiked for one reading'),
  planned('coarse', 'flow', 182, 15, 'the flow meter has lost its decimals: it shows whole litres only'),
];

/** The fault in force at a step, counted from 0; null while nothing is wrong. */
export function faultAt(step: number): PlannedFault | null {
  const inRound = step % ROUND;
  return SCHEDULE.find(({ from, to }) => inRound >= from && inRound < to) ?? null;
}

/** The fault to tell people of at a step: the one in force, or a short one that has just passed. */
export function faultToTell(step: number): PlannedFault | null {
  const inRound = step % ROUND;
  return SCHEDULE.find(({ from, to }) => inRound >= from && inRound < Math.max(to, from + SAID_FOR)) ?? null;
}
