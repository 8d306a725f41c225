import { RULES, SUPPLEMENTARY_RULES, type Rule, type Side } from './rules.js';
import { LINES, RUNS, TREND, VALUE, Z } from './state.js';

const AT_VALUE = VALUE;
const AT_Z = Z;
// Doubles: the lines at 1, 2 and 3 sigmas, stretched; the value before.
const LINE1 = LINES;
const LINE2 = LINES + 1;
const LINE3 = LINES + 2;
const BEFORE = TREND;
// Integers.
const RECENT = RUNS; // which of the newest readings lay beyond a line: four shift registers in one word, see below
const ABOVE = RUNS + 1; // readings in a row above the centre, and below it
const BELOW = RUNS + 2;
const RUN = RUNS + 3; // readings in a row rising (positive) or falling (negative), the first included
const ZIGZAG = RUNS + 4; // readings in a row that alternate up and down, the first two included
const WITHIN = RUNS + 5;
const OUTSIDE = RUNS + 6;
const SEEN = RUNS + 7;
const SIDE_RUN = RUNS + 8;
const ENABLED = RUNS + 9;

// RECENT has a byte for each side, that of the high one first: three readings beyond 2 sigma, then five beyond 1 sigma,
// the newest in the lowest bit of each register.
const TWO = 0;
const ONE = 3;
const SIDE_BITS = 8;
const KEEP = 0b11110_110_11110_110; // after a shift by one: what has not left its register
const LONGEST = 30; // a run of 2^30 readings grows no further

/** Bit of each rule in the masks here: its place in RULES. */
export const RULE_BIT: Readonly<Record<Rule, number>> = Object.fromEntries(RULES.map((rule, i) => [rule, 1 << i])) as Record<Rule, number>;

const SUPPLEMENTARY = SUPPLEMENTARY_RULES.reduce((mask, rule) => mask | RULE_BIT[rule], 0);

/** For each state of one side's registers: the bits of the rules whose pattern holds with the newest reading in it. */
const HOLDS = Uint8Array.from({ length: 1 << SIDE_BITS }, (_, registers) => {
  const two = (registers >> TWO) & 0b111;
  const one = (registers >> ONE) & 0b11111;
  return (
    (two & 1 && ones(two) >= 2 ? RULE_BIT['two-of-three-beyond-2'] : 0) | (one & 1 && ones(one) >= 4 ? RULE_BIT['four-of-five-beyond-1'] : 0)
  );
});

function ones(mask: number): number {
  let count = 0;
  for (let rest = mask; rest !== 0; rest &= rest - 1) count++;
  return count;
}

/*
 * The run rules over the zones of one channel. The four zone rules are those of Western Electric, Statistical Quality
 * Control Handbook (1956); the five supplementary ones those of Nelson, Journal of Quality Technology 16(4), 1984.
 * A value exactly on a line is not beyond it; exactly on the centre is on neither side; exactly at 1 sigma is neither
 * within nor outside. A rule signals at every reading at which its pattern holds and in which the newest takes part.
 */

/**
 * @param k control limits in sigmas: the lines at 1, 2 and 3 sigmas are stretched by g = k / 3
 * @param sideRun length of the run that `eight-one-side` asks for
 */
export function layPatterns(s: Float64Array, c: Int32Array, rules: readonly Rule[], k: number, sideRun: number): void {
  s[LINE1] = k / 3;
  s[LINE2] = (2 * k) / 3;
  s[LINE3] = k;
  c[SIDE_RUN] = sideRun;
  c[ENABLED] = rules.reduce((mask, rule) => mask | RULE_BIT[rule], 0);
}

/**
 * Takes the reading at hand. Noise decides each comparison anew, and no processor foresees it: so there are no branches,
 * comparisons become bits.
 * @returns the mask of enabled rules that signal, `inconsistent` not among them; 0 where all is quiet
 */
export function findPatterns(s: Float64Array, c: Int32Array): number {
  const z = s[AT_Z]!;
  const far = Math.abs(z);
  const above = 0 - +(z > 0); // all bits, or none
  const below = 0 - +(z < 0);
  const beyond = (+(far > s[LINE1]!) << ONE) | (+(far > s[LINE2]!) << TWO);
  const recent = ((c[RECENT]! << 1) & KEEP) | (beyond & above) | ((beyond & below) << SIDE_BITS);
  const high = longer(c[ABOVE]!) & above;
  const low = longer(c[BELOW]!) & below;
  c[RECENT] = recent;
  c[ABOVE] = high;
  c[BELOW] = low;
  const run = high | low; // one of them is 0
  const enabled = c[ENABLED]!;
  let fired = +(far > s[LINE3]!) | HOLDS[recent & 0xff]! | HOLDS[recent >> SIDE_BITS]! | (+(run >= c[SIDE_RUN]!) << 3);
  if ((enabled & SUPPLEMENTARY) !== 0) fired |= supplementary(s, c);
  return fired & enabled;
}

function supplementary(s: Float64Array, c: Int32Array): number {
  const far = Math.abs(s[AT_Z]!);
  const value = s[AT_VALUE]!; // not z: the order of readings must not depend on its rounding
  const last = s[BEFORE]!;
  s[BEFORE] = value;
  if (c[SEEN] === 0) {
    c[SEEN] = 1;
    c[RUN] = 1;
    c[ZIGZAG] = 1;
  } else {
    const was = c[RUN]!;
    const up = value > last;
    const level = value === last;
    // A reading that turns back begins a new run of two; a tie begins one of one.
    c[ZIGZAG] = level ? 1 : up === was > 1 && (was > 1 || was < -1) ? 2 : longer(c[ZIGZAG]!);
    c[RUN] = level ? 1 : up ? (was > 1 ? longer(was) : 2) : was < -1 ? -longer(-was) : -2;
  }
  c[WITHIN] = longer(c[WITHIN]!) & (0 - +(far < s[LINE1]!));
  c[OUTSIDE] = longer(c[OUTSIDE]!) & (0 - +(far > s[LINE1]!));
  return (
    (+((c[ABOVE]! | c[BELOW]!) >= 9) << 4) |
    (+(Math.abs(c[RUN]) >= 6) << 5) |
    (+(c[ZIGZAG] >= 14) << 6) |
    (+(c[WITHIN] >= 15) << 7) |
    (+(c[OUTSIDE] >= 8) << 8)
  );
}

/** One more, up to the longest run that is counted. */
function longer(run: number): number {
  return run + 1 - (run >> LONGEST);
}

/** The side of a rule's pattern that holds now; null where it has none. */
export function sideOf(rule: Rule, s: Float64Array, c: Int32Array): Side | null {
  switch (rule) {
    case 'trend-of-6':
      return c[RUN]! > 0 ? 'high' : 'low';
    case 'alternating-14':
    case 'fifteen-within-1':
    case 'eight-outside-1':
      return null;
    default:
      return s[AT_Z]! > 0 ? 'high' : 'low';
  }
}
