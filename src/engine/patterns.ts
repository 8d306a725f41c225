import { VALUE, Z } from './hand.js';
import { RULES, SUPPLEMENTARY_RULES, type Rule, type Side } from './rules.js';

// Places in the state.
const RECENT = 0; // which of the newest readings lay beyond a line: four shift registers in one word, see below
const SIDE = 1; // readings in a row on one side: positive above the centre, negative below
const RUN = 2; // readings in a row rising (positive) or falling (negative), the first included
const ZIGZAG = 3; // readings in a row that alternate up and down, the first two included
const WITHIN = 4;
const OUTSIDE = 5;
const SEEN = 6;
const LENGTH = 7;

// Bits of RECENT, the newest reading in the lowest bit of each register: three beyond +2, three beyond -2, five beyond +1, five beyond -1.
const HIGH2 = 0;
const LOW2 = 3;
const HIGH1 = 6;
const LOW1 = 11;
const KEEP = 0b11110_11110_110_110; // after a shift by one: what has not left its register

/** Bit of each rule in the mask that `step` returns. */
export const RULE_BIT: Readonly<Record<Rule, number>> = Object.fromEntries(RULES.map((rule, i) => [rule, 1 << i])) as Record<Rule, number>;

const SUPPLEMENTARY = SUPPLEMENTARY_RULES.reduce((mask, rule) => mask | RULE_BIT[rule], 0);

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
    private readonly hand: Float64Array,
  ) {
    this.one = scale;
    this.two = 2 * scale;
    this.three = 3 * scale;
    this.enabled = rules.reduce((mask, rule) => mask | RULE_BIT[rule], 0);
  }

  /** Takes the reading at hand. @returns the mask of enabled rules that signal; 0 where all is quiet */
  step(): number {
    const { state: s, hand, one } = this;
    const z = hand[Z]!;
    const far = z < 0 ? -z : z;
    let recent = (s[RECENT]! << 1) & KEEP;
    let fired = 0;
    if (far > one) {
      recent |= z > 0 ? 1 << HIGH1 : 1 << LOW1;
      if (far > this.two) {
        recent |= z > 0 ? 1 << HIGH2 : 1 << LOW2;
        if (far > this.three) fired = 1;
        if (TWO_OF_THREE[z > 0 ? (recent >> HIGH2) & 7 : (recent >> LOW2) & 7]) fired |= 2;
      }
      if (FOUR_OF_FIVE[z > 0 ? (recent >> HIGH1) & 31 : (recent >> LOW1) & 31]) fired |= 4;
    }
    s[RECENT] = recent;
    const side = s[SIDE]!;
    const longer = z > 0 ? (side > 0 ? side + 1 : 1) : z < 0 ? (side < 0 ? side - 1 : -1) : 0;
    s[SIDE] = longer;
    const run = longer < 0 ? -longer : longer;
    if (run >= this.sideRun) fired |= 8;
    if ((this.enabled & SUPPLEMENTARY) !== 0) fired |= this.supplementary(far > one ? 1 : far < one ? -1 : 0, run);
    return fired & this.enabled;
  }

  /** @param zone 1: outside one sigma, -1: within, 0: exactly on the line */
  private supplementary(zone: number, run: number): number {
    const { state: s, before, hand } = this;
    const value = hand[VALUE]!; // not z: the order of readings must not depend on its rounding
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
    s[WITHIN] = zone < 0 ? s[WITHIN]! + 1 : 0;
    s[OUTSIDE] = zone > 0 ? s[OUTSIDE]! + 1 : 0;
    if (s[WITHIN] >= 15) fired |= 128;
    if (s[OUTSIDE] >= 8) fired |= 256;
    return fired;
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
        return this.hand[Z]! > 0 ? 'high' : 'low';
    }
  }

  arrays(): Readonly<Record<string, Float64Array | Int32Array>> {
    return { patterns: this.state, before: this.before };
  }
}
