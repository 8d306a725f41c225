import { VALUE, Z } from './hand.js';
import { RULES, SUPPLEMENTARY_RULES, type Rule, type Side } from './rules.js';

// Places in the reading at hand, and in the state.
const AT_VALUE = VALUE;
const AT_Z = Z;
const RECENT = 0; // which of the newest readings lay beyond a line: four shift registers in one word, see below
const ABOVE = 1; // readings in a row above the centre, and below it
const BELOW = 2;
const RUN = 3; // readings in a row rising (positive) or falling (negative), the first included
const ZIGZAG = 4; // readings in a row that alternate up and down, the first two included
const WITHIN = 5;
const OUTSIDE = 6;
const SEEN = 7;
const LENGTH = 8;

// RECENT has a byte for each side, that of the high one first: three readings beyond 2 sigma, then five beyond 1 sigma,
// the newest in the lowest bit of each register.
const TWO = 0;
const ONE = 3;
const SIDE_BITS = 8;
const KEEP = 0b11110_110_11110_110; // after a shift by one: what has not left its register

/** Bit of each rule in the mask that `step` returns. */
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

const LONGEST = 30; // a run of 2^30 readings grows no further

/**
 * The run rules over the zones of one channel. The four zone rules are those of Western Electric, Statistical Quality
 * Control Handbook (1956); the five supplementary ones those of Nelson, Journal of Quality Technology 16(4), 1984.
 * A value exactly on a line is not beyond it; exactly on the centre is on neither side; exactly at 1 sigma is neither
 * within nor outside. A rule signals at every reading at which its pattern holds and in which the newest takes part.
 */
export class Patterns {
  private readonly state = new Int32Array(LENGTH);
  private readonly before = new Float64Array(1);
  /** the lines at 1, 2 and 3 sigmas, stretched */
  private readonly lines: Float64Array;
  private readonly enabled: number;

  /**
   * @param k control limits in sigmas: the lines at 1, 2 and 3 sigmas are stretched by g = k / 3
   * @param sideRun length of the run that `eight-one-side` asks for
   */
  constructor(
    rules: readonly Rule[],
    k: number,
    private readonly sideRun: number,
    private readonly hand: Float64Array,
  ) {
    this.lines = Float64Array.of(k / 3, (2 * k) / 3, k);
    this.enabled = rules.reduce((mask, rule) => mask | RULE_BIT[rule], 0);
  }

  /**
   * Takes the reading at hand. Noise decides each comparison anew, and no processor foresees it: so there are no branches,
   * comparisons become bits.
   * @returns the mask of enabled rules that signal; 0 where all is quiet
   */
  step(): number {
    const { state: s, hand, lines, enabled } = this;
    const z = hand[AT_Z]!;
    const far = Math.abs(z);
    const above = 0 - +(z > 0); // all bits, or none
    const below = 0 - +(z < 0);
    const beyond = (+(far > lines[0]!) << ONE) | (+(far > lines[1]!) << TWO);
    const recent = ((s[RECENT]! << 1) & KEEP) | (beyond & above) | ((beyond & below) << SIDE_BITS);
    s[RECENT] = recent;
    const high = longer(s[ABOVE]!) & above;
    const low = longer(s[BELOW]!) & below;
    s[ABOVE] = high;
    s[BELOW] = low;
    const run = high | low; // one of them is 0
    let fired = +(far > lines[2]!) | HOLDS[recent & 0xff]! | HOLDS[recent >> SIDE_BITS]! | (+(run >= this.sideRun) << 3);
    if ((enabled & SUPPLEMENTARY) !== 0) fired |= this.supplementary(far, run);
    return fired & enabled;
  }

  private supplementary(far: number, run: number): number {
    const { state: s, before, hand } = this;
    const one = this.lines[0]!;
    const value = hand[AT_VALUE]!; // not z: the order of readings must not depend on its rounding
    const last = before[0]!;
    before[0] = value;
    if (s[SEEN] === 0) {
      s[SEEN] = 1;
      s[RUN] = 1;
      s[ZIGZAG] = 1;
    } else {
      const was = s[RUN]!;
      const up = value > last;
      const level = value === last;
      // A reading that turns back begins a new run of two; a tie begins one of one.
      s[ZIGZAG] = level ? 1 : up === was > 1 && (was > 1 || was < -1) ? 2 : longer(s[ZIGZAG]!);
      s[RUN] = level ? 1 : up ? (was > 1 ? longer(was) : 2) : was < -1 ? -longer(-was) : -2;
    }
    s[WITHIN] = longer(s[WITHIN]!) & (0 - +(far < one));
    s[OUTSIDE] = longer(s[OUTSIDE]!) & (0 - +(far > one));
    return (
      (+(run >= 9) << 4) |
      (+(Math.abs(s[RUN]) >= 6) << 5) |
      (+(s[ZIGZAG] >= 14) << 6) |
      (+(s[WITHIN] >= 15) << 7) |
      (+(s[OUTSIDE] >= 8) << 8)
    );
  }

  /** The side of a rule's pattern that holds now; null where it has none. */
  sideOf(rule: Rule): Side | null {
    switch (rule) {
      case 'trend-of-6':
        return this.state[RUN]! > 0 ? 'high' : 'low';
      case 'alternating-14':
      case 'fifteen-within-1':
      case 'eight-outside-1':
        return null;
      default:
        return this.hand[AT_Z]! > 0 ? 'high' : 'low';
    }
  }

  arrays(): Readonly<Record<string, Float64Array | Int32Array>> {
    return { patterns: this.state, before: this.before };
  }
}

/** One more, up to the longest run that is counted. */
function longer(run: number): number {
  return run + 1 - (run >> LONGEST);
}
