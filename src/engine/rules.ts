/** Names of the detectors (DESIGN: "Detectors: names and exact meaning"). Fixed: scripts read them. */
export const ZONE_RULES = ['one-beyond-3', 'two-of-three-beyond-2', 'four-of-five-beyond-1', 'eight-one-side'] as const;
export const SUPPLEMENTARY_RULES = [
  'nine-one-side',
  'trend-of-6',
  'alternating-14',
  'fifteen-within-1',
  'eight-outside-1',
] as const;
export const HEALTH_DETECTORS = ['frozen', 'silent', 'off-scale', 'tolerance'] as const;

/** What may stand in a channel's `rules:` list. */
export const RULES = [...ZONE_RULES, ...SUPPLEMENTARY_RULES, 'inconsistent'] as const;

export type Rule = (typeof RULES)[number];
export type Detector = Rule | (typeof HEALTH_DETECTORS)[number];
export type Side = 'high' | 'low';

/** Bit of each rule in a mask: its place in RULES. */
export const RULE_BIT: Readonly<Record<Rule, number>> = Object.fromEntries(RULES.map((rule, i) => [rule, 1 << i])) as Record<Rule, number>;

export function ruleMask(rules: readonly Rule[]): number {
  return rules.reduce((mask, rule) => mask | RULE_BIT[rule], 0);
}
