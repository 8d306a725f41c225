import { absorptionMoments, absorptionPercentiles, type RunLength, type TransientChain } from './absorption.js';
import { between, cdf, upperTail } from './normal.js';
import { zoneAutomaton, ZONES, type ZoneAutomaton, type ZonePattern } from './zoneAutomaton.js';

/** The process as it is, in sigmas of the band: how far its mean has moved, and its spread as a ratio to the band's. */
export interface Departure {
  readonly shift: number;
  readonly spread: number;
}

export const IN_CONTROL: Departure = { shift: 0, spread: 1 };

const automata = new Map<string, ZoneAutomaton>();

function automatonOf(rules: readonly ZonePattern[], sideRun: number): ZoneAutomaton {
  const name = `${[...rules].sort().join()}/${sideRun}`;
  let automaton = automata.get(name);
  if (!automaton) {
    automaton = zoneAutomaton(rules, sideRun);
    automata.set(name, automaton);
  }
  return automaton;
}

/** Probabilities of the eight zones for independent normal readings. @param scale g, which stretches the lines at 1, 2, 3 */
export function zoneProbabilities(scale: number, { shift, spread }: Departure): Float64Array {
  const line = (k: number): number => (k * scale - shift) / spread;
  const p = new Float64Array(ZONES);
  p[0] = cdf(line(-3));
  for (let zone = 1; zone < 7; zone++) p[zone] = between(line(zone - 4), line(zone - 3));
  p[7] = upperTail(line(3));
  return p;
}

/**
 * The Markov chain of a set of zone rules: independent normal readings, known centre and sigma, from a fresh start.
 * @param sideRun length of the run on one side (`eight-one-side`)
 */
export function zoneChain(rules: readonly ZonePattern[], scale: number, sideRun: number, departure: Departure): TransientChain {
  const { states, next } = automatonOf(rules, sideRun);
  const p = zoneProbabilities(scale, departure);
  const start = new Int32Array(states + 1);
  const to: number[] = [];
  const weight: number[] = [];
  const signal = new Float64Array(states);
  for (let state = 0; state < states; state++) {
    for (let zone = 0; zone < ZONES; zone++) {
      const target = next[state * ZONES + zone]!;
      if (target < 0) signal[state]! += p[zone]!;
      else {
        to.push(target);
        weight.push(p[zone]!);
      }
    }
    start[state + 1] = to.length;
  }
  return { states, start, to: Int32Array.from(to), weight: Float64Array.from(weight), signal };
}

/** Mean run length of a set of zone rules. @see zoneRunLength */
export function zoneArl(rules: readonly ZonePattern[], scale: number, sideRun = 8, departure: Departure = IN_CONTROL): number {
  return absorptionMoments(zoneChain(rules, scale, sideRun, departure)).arl;
}

/**
 * Exact run length of a set of zone rules (Champ and Woodall, Technometrics 29(4), 1987), in readings.
 * @param rules at least one
 * @param scale the limit scale g > 0 (1: textbook zones)
 */
export function zoneRunLength(rules: readonly ZonePattern[], scale: number, sideRun = 8, departure: Departure = IN_CONTROL): RunLength {
  const chain = zoneChain(rules, scale, sideRun, departure);
  const [median, p90] = absorptionPercentiles(chain, [0.5, 0.9]);
  return { ...absorptionMoments(chain), median: median!, p90: p90! };
}
