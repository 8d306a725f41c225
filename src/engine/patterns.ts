import { RULES, type Rule, type Side } from './rules.js';

// Places in the state.
const HIGH2 = 0; // newest three readings beyond +2, newest in bit 0; and so on
const LOW2 = 1;
const HIGH1 = 2; // newest five
const LOW1 = 3;
const SIDE = 4; // readings in a row on one side: positive above the centre, negative below
const RUN = 5; // readings in a row rising (positive) or falling (negative), the first included
const ZIGZAG = 6; // readings in a row that alternate up and down, the first two included
const WITHIN = 7;
const OUTSIDE = 8;
const SEEN = 9;
const LENGTH = 10;

/** Bit of each rule in the mask that `step` returns. */
export const RULE_BIT: Readonly<Record<Rule, number>> = Object.fromEntries(RULES.map((rule, i) => [rule, 1 << i])) as Record<Rule, number>;

// Whether two of three / four of five bits are set and the newest is among them.
const TWO_OF_THREE = Uint8Array.from({ length: 8 }, (_, mask) => (mask & 1 && mask > 1 ? 1 : 0));
const FOUR_OF_FIVE = Uint8Array.from({ length: 32 }, (_, mask) => (mask & 1 && bits(mask) >= 4 ? 1 : 0));

function bits(mask: number): number {
  let count = 0;
  for (let rest = mask; rest !== 0; rest &= rest - 1) count++;
  return count;
}

/**
 * The run rules over the zones of one channel. The four zone rules are those of Western Electric, Statistical Quality
 * Control Handbook (1956); the five supplementary ones those of Nelson, Journal of Quality Technology 16(4), 1984.
 * A value exactly on a line is not beyond it; exactly on the centre is on neither side; exactly at 1 sigma is neither
 * within nor outside. A rule signals at every reading at which its pattern holds and in which the newest takes part.
 */
export class Patterns {
  private readonly state = new Int32Array(LENGTH);
  private readonly before = new Float64Array(1);
  private readonly one: number;
  private readonly two: number;
  private readonly three: number;
  private readonly enabled: number;

  /**
   * @param scale g, which stretches the lines at 1, 2 and 3 sigmas
   * @param sideRun length of the run that `eight-one-side` asks for
   */
  constructor(
    rules: readonly Rule[],
    scale: number,
    private readonly sideRun: number,
  ) {
    this.one = scale;
    this.two = 2 * scale;
    this.three = 3 * scale;
    this.enabled = rules.reduce((mask, rule) => mask | RULE_BIT[rule], 0);
  }

  /**
   * Takes one reading.
   * @param value for the order of readings, so that a trend does not depend on the rounding of z
   * @param z (value - centre) / sigma
   * @returns the mask of enabled rules that signal; 0 where all is quiet
   */
  step(value: number, z: number): number {
    const { state: s, one, two, three } = this;
    const far = z < 0 ? -z : z;
    let fired = far > three ? 1 : 0;
    s[HIGH2] = ((s[HIGH2]! << 1) | (z > two ? 1 : 0)) & 7;
    s[LOW2] = ((s[LOW2]! << 1) | (z < -two ? 1 : 0)) & 7;
    s[HIGH1] = ((s[HIGH1]! << 1) | (z > one ? 1 : 0)) & 31;
    s[LOW1] = ((s[LOW1]! << 1) | (z < -one ? 1 : 0)) & 31;
    if (far > one) {
      if (TWO_OF_THREE[s[HIGH2]]! | TWO_OF_THREE[s[LOW2]]!) fired |= 2;
      if (FOUR_OF_FIVE[s[HIGH1]]! | FOUR_OF_FIVE[s[LOW1]]!) fired |= 4;
    }
    const side = s[SIDE]!;
    const longer = z > 0 ? (side > 0 ? side + 1 : 1) : z < 0 ? (side < 0 ? side - 1 : -1) : 0;
    s[SIDE] = longer;
    const run = longer < 0 ? -longer : longer;
    if (run >= this.sideRun) fired |= 8;
    if ((this.enabled & 0x1f0) !== 0) fired |= this.supplementary(value, far, run);
    return fired & this.enabled;
  }

  private supplementary(value: number, far: number, run: number): number {
    const { state: s, before, one } = this;
    let fired = run >= 9 ? 16 : 0;
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
      s[ZIGZAG] = level ? 1 : up === was > 1 && (was > 1 || was < -1) ? 2 : s[ZIGZAG]! + 1;
      s[RUN] = level ? 1 : up ? (was > 1 ? was + 1 : 2) : was < -1 ? was - 1 : -2;
    }
    if (s[RUN] >= 6 || s[RUN] <= -6) fired |= 32;
    if (s[ZIGZAG] >= 14) fired |= 64;
    s[WITHIN] = far < one ? s[WITHIN]! + 1 : 0;
    s[OUTSIDE] = far > one ? s[OUTSIDE]! + 1 : 0;
    if (s[WITHIN] >= 15) fired |= 128;
    if (s[OUTSIDE] >= 8) fired |= 256;
    return fired;
  }

  /** The side of a rule's pattern that holds now; null where it has none. */
  sideOf(rule: Rule, z: number): Side | null {
    switch (rule) {
      case 'trend-of-6':
        return this.state[RUN]! > 0 ? 'high' : 'low';
      case 'alternating-14':
      case 'fifteen-within-1':
      case 'eight-outside-1':
        return null;
      default:
        return z > 0 ? 'high' : 'low';
    }
  }

  /** Readings in a row on one side of the centre. */
  get run(): number {
    return Math.abs(this.state[SIDE]!);
  }

  arrays(): Readonly<Record<string, Float64Array | Int32Array>> {
    return { patterns: this.state, before: this.before };
  }
}
