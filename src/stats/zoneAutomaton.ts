/** Run rules that look at nothing but the zones of recent readings. */
export type ZonePattern =
  | 'one-beyond-3'
  | 'two-of-three-beyond-2'
  | 'four-of-five-beyond-1'
  | 'eight-one-side'
  | 'nine-one-side'
  | 'fifteen-within-1'
  | 'eight-outside-1';

/** Zones from low to high: beyond -3, -3 to -2, -2 to -1, -1 to 0, 0 to 1, 1 to 2, 2 to 3, beyond 3 (times the scale g). */
export const ZONES = 8;

/** The least automaton that tells, from the zones of the readings so far, whether a rule signals. State 0 is the start. */
export interface ZoneAutomaton {
  readonly states: number;
  /** next[state * ZONES + zone]: the state after a reading in that zone, or -1 where a rule signals. */
  readonly next: Int32Array;
}

interface History {
  /** Newest two readings beyond 2, newest four beyond 1: bit 0 is the newest. */
  readonly high2: number;
  readonly low2: number;
  readonly high1: number;
  readonly low1: number;
  /** Readings in a row on one side: positive above, negative below. */
  readonly side: number;
  readonly within: number;
  readonly outside: number;
}

const START: History = { high2: 0, low2: 0, high1: 0, low1: 0, side: 0, within: 0, outside: 0 };

/**
 * Builds and minimises the automaton of a set of zone rules (the Markov chain representation of Champ and Woodall,
 * Technometrics 29(4), 1987; minimisation by partition refinement, Moore 1956).
 * @param sideRun the run on one side at which `eight-one-side` signals
 */
export function zoneAutomaton(rules: readonly ZonePattern[], sideRun = 8): ZoneAutomaton {
  return minimise(explore(new Set(rules), sideRun));
}

/** All reachable histories, cut to what the rules can still see. */
function explore(rules: ReadonlySet<ZonePattern>, sideRun: number): Int32Array {
  const longest = Math.max(rules.has('eight-one-side') ? sideRun : 0, rules.has('nine-one-side') ? 9 : 0);
  const shortest = Math.min(rules.has('eight-one-side') ? sideRun : Infinity, rules.has('nine-one-side') ? 9 : Infinity);
  const step = (state: History, zone: number): History | null => {
    const high = zone >= 4;
    const depth = high ? zone - 4 : 3 - zone; // 0: within 1, 1: 1 to 2, 2: 2 to 3, 3: beyond 3
    const beyond = (lines: number, side: boolean): number => (depth >= lines && high === side ? 1 : 0);
    if (rules.has('one-beyond-3') && depth === 3) return null;
    const two = rules.has('two-of-three-beyond-2');
    const four = rules.has('four-of-five-beyond-1');
    const high2 = two ? ((state.high2 << 1) | beyond(2, true)) & 7 : 0;
    const low2 = two ? ((state.low2 << 1) | beyond(2, false)) & 7 : 0;
    const high1 = four ? ((state.high1 << 1) | beyond(1, true)) & 31 : 0;
    const low1 = four ? ((state.low1 << 1) | beyond(1, false)) & 31 : 0;
    if ((high2 & 1 && bits(high2) >= 2) || (low2 & 1 && bits(low2) >= 2)) return null;
    if ((high1 & 1 && bits(high1) >= 4) || (low1 & 1 && bits(low1) >= 4)) return null;
    const side = longest === 0 ? 0 : high ? Math.max(state.side, 0) + 1 : Math.min(state.side, 0) - 1;
    if (longest > 0 && Math.abs(side) >= shortest) return null;
    const within = rules.has('fifteen-within-1') && depth === 0 ? state.within + 1 : 0;
    const outside = rules.has('eight-outside-1') && depth > 0 ? state.outside + 1 : 0;
    if (within >= 15 || outside >= 8) return null;
    return { high2: high2 & 3, low2: low2 & 3, high1: high1 & 15, low1: low1 & 15, side, within, outside };
  };

  const number = new Map<string, number>([[key(START), 0]]);
  const states = [START];
  const next: number[] = [];
  for (let from = 0; from < states.length; from++) {
    for (let zone = 0; zone < ZONES; zone++) {
      const to = step(states[from]!, zone);
      if (to === null) {
        next.push(-1);
        continue;
      }
      const name = key(to);
      let index = number.get(name);
      if (index === undefined) {
        index = states.length;
        number.set(name, index);
        states.push(to);
      }
      next.push(index);
    }
  }
  return Int32Array.from(next);
}

const key = ({ high2, low2, high1, low1, side, within, outside }: History): string =>
  `${high2},${low2},${high1},${low1},${side},${within},${outside}`;

function bits(mask: number): number {
  let count = 0;
  for (let rest = mask; rest !== 0; rest &= rest - 1) count++;
  return count;
}

/** Merges states that no sequence of readings tells apart. The start's class becomes state 0. */
function minimise(next: Int32Array): ZoneAutomaton {
  const states = next.length / ZONES;
  let classOf = new Int32Array(states);
  let classes = 1;
  for (;;) {
    const numbers = new Map<string, number>();
    const refined = new Int32Array(states);
    for (let state = 0; state < states; state++) {
      let signature = String(classOf[state]);
      for (let zone = 0; zone < ZONES; zone++) {
        const to = next[state * ZONES + zone]!;
        signature += to < 0 ? ',x' : `,${classOf[to]}`;
      }
      let index = numbers.get(signature);
      if (index === undefined) {
        index = numbers.size;
        numbers.set(signature, index);
      }
      refined[state] = index;
    }
    classOf = refined;
    if (numbers.size === classes) break;
    classes = numbers.size;
  }
  const merged = new Int32Array(classes * ZONES);
  for (let state = 0; state < states; state++)
    for (let zone = 0; zone < ZONES; zone++) {
      const to = next[state * ZONES + zone]!;
      merged[classOf[state]! * ZONES + zone] = to < 0 ? -1 : classOf[to]!;
    }
  return { states: classes, next: merged };
}
