import { afterEach, describe, expect, it } from 'vitest';
import type { MqttClient } from 'mqtt';
import { mqttSource } from '../../adapters/mqtt/source.js';
import type { Source } from '../../adapters/source.js';
import { atBroker, wantedOn } from '../adapters/mqttOptions.js';
import { RecordingSink, until } from '../adapters/recordingSink.js';
import { Broker } from './broker.js';

const HOSTILE = [
  '',
  ' ',
  '1\u001b[2J',
  '\u001b]0;owned\u0007',
  '\u0000',
  '{bold}41{/bold}',
  '$(reboot)',
  '1e999999x',
  '0x29',
  '41,5',
  '[41]',
  '{"v":41',
  'null',
  '\u202e41',
  '４１', // digits of full width
  'A'.repeat(70_000),
];
const BYTES = [Buffer.of(0xff, 0xfe), Buffer.of(0x34, 0x31, 0xc0), Buffer.of(0xed, 0xa0, 0x80)];
/** mosquitto itself refuses control characters in topics; those stand in tests/adapters. */
const TOPICS = ['cell/{bold}', 'cell/\u202e', 'cell/__proto__', 'cell/' + 'x'.repeat(5000), 'cell//', 'cell/'];

describe('thousands of hostile messages through a real broker', () => {
  let broker: Broker;
  let publisher: MqttClient;
  let source: Source;
  let sink: RecordingSink;

  const run = async (of: RecordingSink): Promise<void> => {
    broker = await Broker.start();
    publisher = await broker.publisher();
    sink = of;
    source = mqttSource('bus', atBroker(broker.url, { qos: 0 }), [wantedOn('cell/#'), wantedOn('cell/flow', { slot: 1, value: '/v' })]);
    source.start(sink);
    await until(() => sink.is('open'), 'it is connected');
  };

  afterEach(async () => {
    await source.stop();
    await publisher.endAsync(true);
    await broker.dispose();
  });

  it('give no reading, and the good ones among them all come', async () => {
    await run(new RecordingSink());
    const good: number[] = [];
    let hostile = 0;
    for (let i = 0; i < 4000; i++) {
      if (i % 20 === 0) {
        good.push(i);
        await publisher.publishAsync('cell/flow', String(i));
      }
      const payload = i % 7 === 0 ? BYTES[i % BYTES.length]! : HOSTILE[i % HOSTILE.length]!;
      hostile++;
      await publisher.publishAsync(i % 3 === 0 ? TOPICS[i % TOPICS.length]! : 'cell/flow', payload);
    }
    await publisher.publishAsync('cell/flow', '-1');
    await until(() => sink.values().includes(-1), 'the last has come');
    expect(sink.values()).toEqual([...good, -1]);
    expect(sink.values(1)).toEqual([]);
    expect(sink.faults.length).toBeGreaterThanOrEqual(hostile);
    expect(sink.count('too-long')).toBeGreaterThan(100);
    expect(sink.count('bad-bytes')).toBeGreaterThan(500);
    expect(sink.phases.map(({ phase }) => phase)).toEqual(['connecting', 'open']);
  });

  it('and a sink that throws stops nothing', async () => {
    let thrown = 0;
    class Thrower extends RecordingSink {
      override reading(slot: number, time: number, value: number): void {
        if (value === 13) {
          thrown++;
          throw new Error('unlucky');
        }
        super.reading(slot, time, value);
      }
    }
    await run(new Thrower());
    for (const value of [12, 13, 14, 13, 15]) await publisher.publishAsync('cell/flow', String(value));
    await until(() => sink.values().includes(15), 'the last has come');
    expect([sink.values(), thrown]).toEqual([[12, 14, 15], 2]);
    expect(sink.count('unread')).toBe(2);
  });
});
