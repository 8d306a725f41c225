import { formatCount, formatDuration } from '../engine/format.js';
import type { ChannelSpec } from '../engine/spec.js';
import { upperTail } from '../stats/normal.js';
import { zoneArl } from '../stats/zoneRunLength.js';
import type { ZonePattern } from '../stats/zoneAutomaton.js';
import type { Stand } from './types.js';

/** What the run rules of a channel cost while nothing is wrong. */
export interface Price {
  /** Mean number of readings until the first false alarm: normal, independent readings, known centre and sigma. */
  readonly readings: number;
  /** The same as time, in ms; null where the interval is not known. */
  readonly time: number | null;
  /** Rules that the figure leaves out, since they have no exact run length here. */
  readonly without: readonly string[];
}

const ZONE_PATTERNS: readonly string[] = [
  'one-beyond-3',
  'two-of-three-beyond-2',
  'four-of-five-beyond-1',
  'eight-one-side',
  'nine-one-side',
  'fifteen-within-1',
  'eight-outside-1',
] satisfies readonly ZonePattern[];

/** The exact in-control mean run length of a channel's rules (Champ and Woodall 1987); null where it has none of them. */
export function price({ rules, k, sideRun, every }: ChannelSpec): Price | null {
  const zone = rules.filter((rule): rule is ZonePattern => ZONE_PATTERNS.includes(rule));
  if (zone.length === 0) return null;
  const readings = meanRunLength(zone, k, sideRun);
  return { readings, time: every === null ? null : readings * every, without: rules.filter((rule) => !ZONE_PATTERNS.includes(rule)) };
}

const solved = new Map<string, number>(); // most channels of a stand have the same rules

function meanRunLength(rules: readonly ZonePattern[], k: number, sideRun: number): number {
  if (rules.length === 1 && rules[0] === 'one-beyond-3') return 1 / (2 * upperTail(k)); // a closed form, which needs no chain
  const key = `${rules.join()} ${k} ${sideRun}`;
  const known = solved.get(key);
  if (known !== undefined) return known;
  const readings = zoneArl(rules, k / 3, sideRun);
  solved.set(key, readings);
  return readings;
}

/** Mean time between false alarms of the whole stand, in ms; null where a channel's interval is not known. */
export function standPrice({ channels }: Stand): number | null {
  let perMs = 0;
  for (const { spec } of channels) {
    const cost = price(spec);
    if (!cost) continue;
    if (cost.time === null) return null;
    perMs += 1 / cost.time;
  }
  return perMs > 0 ? 1 / perMs : Infinity;
}

/** The price of textbook limits in words, for the status line and `check`; null where there is nothing to say. */
export function watchPrice(stand: Stand): string | null {
  if (stand.limits !== 'textbook') return null;
  const time = standPrice(stand);
  if (time === Infinity) return null;
  return time === null
    ? 'textbook limits: the price is not known, since not every channel says how often it is read'
    : `textbook limits: about one false alarm every ${formatDuration(time)} on this stand while nothing is wrong`;
}

/** The price of one channel in words. */
export function priceWords(spec: ChannelSpec): string {
  const cost = price(spec);
  if (!cost) return 'no run rule with a known price';
  const each = cost.time === null ? '' : `, every ${formatDuration(cost.time)}`;
  const without = cost.without.length > 0 ? `; ${cost.without.join(', ')} not counted in` : '';
  return `one false alarm in ${formatCount(cost.readings)} readings${each}${without}`;
}
