import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { Routes } from '../../adapters/mqtt/routes.js';
import { disjoint, isTopicText, join, matcher, overlap } from '../../adapters/mqtt/topics.js';

// The examples are those of MQTT 3.1.1 (OASIS, 29 October 2014), sections 4.7.1 and 4.7.2, which MQTT 5 repeats.
const EXAMPLES: readonly (readonly [filter: string, topic: string, matches: boolean])[] = [
  ['sport/tennis/player1/#', 'sport/tennis/player1', true],
  ['sport/tennis/player1/#', 'sport/tennis/player1/ranking', true],
  ['sport/tennis/player1/#', 'sport/tennis/player1/score/wimbledon', true],
  ['sport/#', 'sport', true],
  ['sport/tennis/+', 'sport/tennis/player1', true],
  ['sport/tennis/+', 'sport/tennis/player1/ranking', false],
  ['sport/+', 'sport', false],
  ['sport/+', 'sport/', true],
  ['+/+', '/finance', true],
  ['/+', '/finance', true],
  ['+', '/finance', false],
  ['#', '$SYS/uptime', false],
  ['+/monitor/Clients', '$SYS/monitor/Clients', false],
  ['$SYS/#', '$SYS/uptime', true],
  ['$SYS/monitor/+', '$SYS/monitor/Clients', true],
];

const level = fc.constantFrom('', 'a', 'b', '$s');
const topicName = fc.array(level, { minLength: 1, maxLength: 4 }).map((levels) => levels.join('/')).filter((topic) => topic !== '');
const topicFilter = fc
  .tuple(fc.array(fc.oneof(level, fc.constant('+')), { maxLength: 3 }), fc.oneof(level, fc.constantFrom('+', '#')))
  .map(([levels, last]) => [...levels, last].join('/'))
  .filter((filter) => filter !== '');
const SEEDED = { seed: 20, numRuns: 1000 };

describe('topic filters', () => {
  it.each(EXAMPLES)('%s and %s: %s', (filter, topic, matches) => {
    expect(matcher(filter)(topic)).toBe(matches);
  });

  it('overlap where one topic matches both', () => {
    fc.assert(
      fc.property(topicFilter, topicFilter, topicName, (one, other, topic) => {
        if (matcher(one)(topic) && matcher(other)(topic)) expect(overlap(one, other)).toBe(true);
        expect(overlap(one, other)).toBe(overlap(other, one));
      }),
      SEEDED,
    );
  });

  it.each([
    ['a/+', '+/b', true],
    ['a/+', 'a/b/c', false],
    ['a/#', 'a', true],
    ['a/#', 'b/#', false],
    ['#', '$SYS/#', false],
    ['a/+/c', 'a/b/#', true],
  ])('%s and %s overlap: %s', (one, other, both) => {
    expect(overlap(one, other)).toBe(both);
  });

  it.each([
    ['a/+', '+/b', '+/+'],
    ['a/b', 'a/+', 'a/+'],
    ['a/#', 'a', 'a/#'],
    ['a/+/c', 'a/b/#', 'a/+/#'],
  ])('%s and %s join to %s', (one, other, joined) => {
    expect(join(one, other)).toBe(joined);
  });

  it('made disjoint match all that they did, and no topic twice', () => {
    fc.assert(
      fc.property(fc.array(topicFilter, { minLength: 1, maxLength: 6 }), topicName, (filters, topic) => {
        const apart = disjoint(filters);
        const times = apart.filter((filter) => matcher(filter)(topic)).length;
        expect(times).toBeLessThanOrEqual(1);
        if (filters.some((filter) => matcher(filter)(topic))) expect(times).toBe(1);
      }),
      SEEDED,
    );
  });

  it('that do not overlap stay as they are', () => {
    expect(disjoint(['a/b', 'a/c', 'b/+', 'a/b', '$SYS/#'])).toEqual(['a/b', 'a/c', 'b/+', '$SYS/#']);
  });

  it('know topics that MQTT forbids', () => {
    expect(isTopicText('cell/flow')).toBe(true);
    expect(isTopicText('cell/\u0000')).toBe(false);
    expect(isTopicText(Buffer.from([0x63, 0xff]).toString('utf8'))).toBe(false);
  });
});

describe('routes', () => {
  it('lead a topic to all whose filter matches it, each once', () => {
    const routes = new Routes([['a/b', 1], ['a/+', 2], ['#', 3], ['a/b', 4], ['c', 5]] as const);
    expect(routes.to('a/b')).toEqual([1, 4, 2, 3]);
    expect(routes.to('c')).toEqual([5, 3]);
    expect(routes.to('d')).toEqual([3]);
    expect(routes.filters).toEqual(['#']);
  });

  it('agree with the filters, topic by topic', () => {
    fc.assert(
      fc.property(fc.array(topicFilter, { minLength: 1, maxLength: 6 }), fc.array(topicName, { maxLength: 6 }), (filters, topics) => {
        const routes = new Routes(filters.map((filter, i) => [filter, i] as const));
        for (const topic of [...topics, ...topics])
          expect(routes.to(topic)!.toSorted()).toEqual(filters.flatMap((filter, i) => (matcher(filter)(topic) ? [i] : [])));
      }),
      SEEDED,
    );
  });

  it('remember a bounded number of topics, and answer right beyond it', () => {
    const routes = new Routes([['a/+', 1]] as const);
    const right = Array.from({ length: 25_000 }, (_, i) => routes.to(`a/${i}`)).filter((taps) => taps?.[0] === 1);
    expect(right).toHaveLength(25_000);
    const { seen } = routes as unknown as { seen: Map<string, unknown> };
    expect(seen.size).toBeLessThanOrEqual(10_000);
  });

  it('refuse a topic that is no text', () => {
    expect(new Routes([['a/+', 1]] as const).to('a/\u0000')).toBeNull();
  });
});
