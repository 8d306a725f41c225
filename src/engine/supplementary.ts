import { ruleMask, RULE_BIT, SUPPLEMENTARY_RULES, type Rule, type Side } from './rules.js';
import { ABOVE, BEFORE, BELOW, ENABLED, LINE1, OUTSIDE, SEEN, TREND, VALUE, WITHIN, Z, ZIGZAG } from './state.js';

export const SUPPLEMENTARY = ruleMask(SUPPLEMENTARY_RULES);

const LONGEST = 2 ** 30; // a run grows no further

/**
 * The five supplementary run rules: Nelson, Journal of Quality Technology 16(4), 1984. Takes the reading at hand, after
 * the quiet path has counted its side. Exactly at 1 sigma it is neither within nor outside; a trend needs strict rises.
 * @returns the mask of those that are on and signal
 */
export function supplementary(s: Float64Array, c: Int32Array): number {
  const value = s[VALUE]!; // not z: the order of readings must not depend on its rounding
  const before = s[BEFORE]!;
  s[BEFORE] = value;
  if (c[SEEN] === 0) {
    c[SEEN] = 1;
    c[TREND] = 1;
    c[ZIGZAG] = 1;
  } else {
    const was = c[TREND]!;
    const up = value > before;
    const level = value === before;
    // A reading that turns back begins a new run of two; a tie begins one of one.
    c[ZIGZAG] = level ? 1 : up === was > 1 && (was > 1 || was < -1) ? 2 : longer(c[ZIGZAG]!);
    c[TREND] = level ? 1 : up ? (was > 1 ? longer(was) : 2) : was < -1 ? -longer(-was) : -2;
  }
  const far = Math.abs(s[Z]!);
  c[WITHIN] = far < s[LINE1]! ? longer(c[WITHIN]!) : 0;
  c[OUTSIDE] = far > s[LINE1]! ? longer(c[OUTSIDE]!) : 0;
  let fired = 0;
  if ((c[ABOVE]! | c[BELOW]!) >= 9) fired |= RULE_BIT['nine-one-side'];
  if (Math.abs(c[TREND]) >= 6) fired |= RULE_BIT['trend-of-6'];
  if (c[ZIGZAG] >= 14) fired |= RULE_BIT['alternating-14'];
  if (c[WITHIN] >= 15) fired |= RULE_BIT['fifteen-within-1'];
  if (c[OUTSIDE] >= 8) fired |= RULE_BIT['eight-outside-1'];
  return fired & c[ENABLED]!;
}

function longer(run: number): number {
  return Math.min(run + 1, LONGEST);
}

/** The side of a rule's pattern that holds at the reading at hand; null where it has none. */
export function sideOf(rule: Rule, s: Float64Array, c: Int32Array): Side | null {
  switch (rule) {
    case 'trend-of-6':
      return c[TREND]! > 0 ? 'high' : 'low';
    case 'alternating-14':
    case 'fifteen-within-1':
    case 'eight-outside-1':
      return null;
    default:
      return s[Z]! > 0 ? 'high' : 'low';
  }
}
