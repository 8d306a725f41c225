import type { Wanted } from '../source.js';

/** From a message's topic to the channels that it is for. Exact topics cost one look-up; filters are compiled once. */
export class Routes<Tap extends { readonly wanted: Wanted }> {
  private readonly exact = new Map<string, Tap[]>();
  private readonly filtered: { readonly matches: (topic: string) => boolean; readonly tap: Tap }[] = [];
  private readonly seen = new Map<string, readonly Tap[]>();
  /** Every distinct filter to subscribe to, none of which another one covers: a broker would deliver twice. */
  readonly filters: readonly string[];

  constructor(taps: readonly Tap[]) {
    const filters = new Set<string>();
    for (const tap of taps) {
      const filter = tap.wanted.topic ?? '';
      filters.add(filter);
      if (isFilter(filter)) this.filtered.push({ matches: matcher(filter), tap });
      else this.exact.set(filter, [...(this.exact.get(filter) ?? []), tap]);
    }
    this.filters = [...filters].filter((filter) => ![...filters].some((other) => other !== filter && covers(other, filter)));
  }

  /** The channels of a topic. Topics from outside are remembered only in bounded number. */
  to(topic: string): readonly Tap[] {
    if (this.filtered.length === 0) return this.exact.get(topic) ?? NOBODY;
    const known = this.seen.get(topic);
    if (known) return known;
    const taps = [...(this.exact.get(topic) ?? []), ...this.filtered.filter(({ matches }) => matches(topic)).map(({ tap }) => tap)];
    if (this.seen.size >= 10_000) this.seen.clear();
    this.seen.set(topic, taps);
    return taps;
  }
}

const NOBODY: readonly never[] = [];

export const isFilter = (topic: string): boolean => topic.includes('+') || topic.includes('#');

/** Matching of topics by MQTT 3.1.1, 4.7: `+` is one level, `#` all that follow and the level above; neither matches a leading `$`. */
export function matcher(filter: string): (topic: string) => boolean {
  const want = filter.split('/');
  const open = want.at(-1) === '#';
  if (open) want.pop();
  return (topic) => {
    const levels = topic.split('/');
    if (topic.startsWith('$') && !filter.startsWith('$')) return false;
    if (open ? levels.length < want.length : levels.length !== want.length) return false;
    return want.every((level, i) => level === '+' || level === levels[i]);
  };
}

/** Whether every topic that `narrow` matches is matched by `wide`. */
function covers(wide: string, narrow: string): boolean {
  if (!isFilter(wide)) return false;
  const w = wide.split('/');
  const n = narrow.split('/');
  if (narrow.startsWith('$') && !wide.startsWith('$')) return false;
  for (let i = 0; i < w.length; i++) {
    if (w[i] === '#') return true;
    if (i >= n.length || n[i] === '#') return false;
    if (w[i] !== '+' && w[i] !== n[i]) return false;
  }
  return w.length === n.length;
}
