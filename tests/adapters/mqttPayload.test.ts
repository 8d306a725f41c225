import { describe, expect, it } from 'vitest';
import { Intake } from '../../adapters/mqtt/intake.js';
import type { Fault, Wanted } from '../../adapters/source.js';
import { wantedOn } from './mqttOptions.js';
import { RecordingSink } from './recordingSink.js';

const LIVE = { retain: false, dup: false };

/** What comes of payloads on the topic `t`. */
function of(payloads: readonly (string | Uint8Array)[], ...wanted: Partial<Wanted>[]): RecordingSink {
  const sink = new RecordingSink();
  const intake = new Intake(wanted.map((more, slot) => wantedOn('t', { slot, ...more })), 1000);
  for (const payload of payloads) intake.take('t', Buffer.from(payload as string), LIVE, sink);
  return sink;
}

describe('a payload that is a number', () => {
  it.each([
    ['41.2', 41.2],
    [' -1.5e3\t', -1500],
    ['.5', 0.5],
    ['NaN', NaN],
    ['inf', Infinity],
  ])('%j is %d', (payload, value) => {
    expect(of([payload], {}).values()).toEqual([value]);
  });

  it.each<[string | Uint8Array, Fault]>([
    ['', 'not-a-number'],
    [' ', 'not-a-number'],
    ['12,5', 'not-a-number'],
    ['0x10', 'not-a-number'],
    ['1 2', 'not-a-number'],
    ['null', 'not-a-number'],
    ['{"v":1}', 'not-a-number'],
    ['1\u0000', 'bad-bytes'],
    [Uint8Array.of(0x31, 0xff), 'bad-bytes'],
    ['9'.repeat(1001), 'too-long'],
  ])('%j is none: %s', (payload, fault) => {
    const sink = of([payload], {});
    expect(sink.readings).toEqual([]);
    expect(sink.faults.map((seen) => seen.fault)).toEqual([fault]);
  });

  it('may be as long as is allowed', () => {
    expect(of(['9'.repeat(1000)], {}).values()).toEqual([Infinity]); // beyond the doubles
  });
});

describe('a payload that is JSON', () => {
  it('serves several channels with pointers of their own', () => {
    const sink = of(['{"flow":41.2,"p":[1.18,2.94],"a/b":{"~":7}}'], { value: '/flow' }, { value: '/p/1' }, { value: '/a~1b/~0' });
    expect([0, 1, 2].map((slot) => sink.values(slot))).toEqual([[41.2], [2.94], [7]]);
  });

  it('serves a channel without a pointer on the same topic only when it is a number', () => {
    const sink = of(['41.2', '{"v":1}'], {}, { value: '' });
    expect([0, 1].map((slot) => sink.values(slot))).toEqual([[41.2], [41.2]]);
    expect(sink.faults.map(({ fault }) => fault)).toEqual(['not-a-number', 'not-a-number']);
  });

  it('brings the time of the reading', () => {
    const sink = of(['{"v":1,"t":"2026-03-01T08:15:30.250Z"}', '{"v":2,"t":1772352930.5}'], { value: '/v', time: '/t' });
    expect(sink.readings.map(({ time }) => new Date(time).toISOString())).toEqual(['2026-03-01T08:15:30.250Z', '2026-03-01T08:15:30.500Z']);
  });

  it.each<[string | Uint8Array, Fault]>([
    ['', 'bad-json'],
    ['{"v":1', 'bad-json'],
    ['{"v":1}\u0000', 'bad-bytes'],
    [Uint8Array.of(0x22, 0xff, 0x22), 'bad-bytes'],
    ['{"w":1}', 'missing-field'],
    ['7', 'missing-field'],
    ['{"v":null}', 'not-a-number'],
    ['{"v":""}', 'not-a-number'],
    ['{"v":[1]}', 'not-a-number'],
    ['{"v":true}', 'not-a-number'],
    ['{"v":1}', 'missing-field'],
    ['{"v":1,"t":"soon","n":1}', 'bad-time'],
    ['{"v":1,"t":null,"n":1}', 'bad-time'],
    ['{"v":1,"t":1772352930}', 'missing-field'],
    ['{"v":1,"t":1772352930,"n":1.5}', 'not-a-number'],
    ['{"v":1,"t":1772352930,"n":"1"}', 'not-a-number'],
    [`{"v":${'['.repeat(990)}`, 'bad-json'],
  ])('%j is none: %s', (payload, fault) => {
    const sink = of([payload], { value: '/v', time: '/t', sequence: '/n' });
    expect(sink.readings).toEqual([]);
    expect(sink.faults.map((seen) => seen.fault)).toEqual([fault]);
  });

  it('is taken once by its sequence number, and each topic counts for itself', () => {
    const sink = new RecordingSink();
    const intake = new Intake([wantedOn('+', { value: '/v', sequence: '/n' })], 1000);
    for (const [topic, n] of [['a', 1], ['b', 1], ['a', 2], ['a', 2], ['a', 1], ['b', 2]] as const)
      intake.take(topic, Buffer.from(`{"v":${n},"n":${n}}`), LIVE, sink);
    expect(sink.values()).toEqual([1, 1, 2, 2]);
    expect(sink.count('repeated')).toBe(2);
  });

  it('that is refused uses up no sequence number', () => {
    expect(of(['{"v":"?","n":5}', '{"v":3,"n":5}'], { value: '/v', sequence: '/n' }).values()).toEqual([3]);
  });

  it('counts for a bounded number of topics, and goes on beyond it', () => {
    const sink = new RecordingSink();
    const intake = new Intake([wantedOn('+', { value: '/v', sequence: '/n' })], 1000);
    for (let i = 0; i < 2500; i++) intake.take(`t${i}`, Buffer.from('{"v":1,"n":1}'), LIVE, sink);
    expect(sink.readings).toHaveLength(2500);
  });
});

describe('a message', () => {
  it('on a topic that nobody wants is passed over in silence', () => {
    const sink = new RecordingSink();
    new Intake([wantedOn('a')], 1000).take('b', Buffer.from('1'), LIVE, sink);
    expect([sink.readings, sink.faults]).toEqual([[], []]);
  });

  it('on a topic that is no text is a fault', () => {
    const sink = new RecordingSink();
    new Intake([wantedOn('a/+')], 1000).take('a/\u0000', Buffer.from('1'), LIVE, sink);
    expect(sink.faults.map(({ fault }) => fault)).toEqual(['bad-bytes']);
  });

  it('that is retained is stale, with the value it has', () => {
    const sink = new RecordingSink();
    new Intake([wantedOn('a', { slot: 4 })], 1000).take('a', Buffer.from('41'), { retain: true, dup: false }, sink);
    expect(sink.staleReadings).toMatchObject([{ slot: 4, value: 41 }]);
    expect([sink.readings.length, sink.count('stale')]).toEqual([0, 1]);
  });
});
