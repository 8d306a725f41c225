import { disjoint, isFilter, isTopicText, matcher } from './topics.js';

const MOST_TOPICS = 10_000; // topics from outside that are remembered

/** From a message's topic to what it is for. Exact topics cost one look-up; filters are compiled once. */
export class Routes<Tap> {
  private readonly exact = new Map<string, Tap[]>();
  private readonly filtered: { readonly matches: (topic: string) => boolean; readonly tap: Tap }[] = [];
  private readonly seen = new Map<string, readonly Tap[] | null>();
  /** What to subscribe to: no two of them match the same topic. */
  readonly filters: readonly string[];

  constructor(taps: readonly (readonly [topic: string, tap: Tap])[]) {
    for (const [topic, tap] of taps) {
      if (isFilter(topic)) this.filtered.push({ matches: matcher(topic), tap });
      else this.exact.set(topic, [...(this.exact.get(topic) ?? []), tap]);
    }
    this.filters = disjoint(taps.map(([topic]) => topic));
  }

  /** What a topic is for, none twice; null where the topic itself is not legible. */
  to(topic: string): readonly Tap[] | null {
    if (this.filtered.length === 0) return this.exact.get(topic) ?? NOBODY;
    let taps = this.seen.get(topic);
    if (taps !== undefined) return taps;
    taps = this.find(topic);
    if (this.seen.size >= MOST_TOPICS) this.seen.clear(); // whoever sends ever new topics costs time, no memory
    this.seen.set(topic, taps);
    return taps;
  }

  private find(topic: string): readonly Tap[] | null {
    const named = this.exact.get(topic) ?? NOBODY;
    const matched = this.filtered.filter(({ matches }) => matches(topic)).map(({ tap }) => tap);
    if (matched.length > 0 && !isTopicText(topic)) return null;
    return [...named, ...matched];
  }
}

const NOBODY: readonly never[] = [];
