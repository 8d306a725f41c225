import { RULE_BIT } from './rules.js';

/*
 * Patterns over the zones as shift registers. A byte for each side: three readings beyond 2 sigma in its low bits, then
 * five beyond 1 sigma, the newest reading in the lowest bit of each register. Western Electric, Statistical Quality
 * Control Handbook (1956).
 */
export const TWO = 0;
export const ONE = 3;
export const SIDE_BITS = 8;
/** After a shift by one: what has not left its register. */
export const KEEP = 0b11110_110_11110_110;

/** For each state of one side's registers: the bits of the rules whose pattern holds with the newest reading in it. */
export const HOLDS = Uint8Array.from({ length: 1 << SIDE_BITS }, (_, registers) => {
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
