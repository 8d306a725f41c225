import { setTimeout as sleep } from 'node:timers/promises';
import { afterEach, describe, expect, it } from 'vitest';
import type { MqttClient } from 'mqtt';
import { UNDER_WAY } from '../../adapters/mqtt/clientOptions.js';
import { mqttSource } from '../../adapters/mqtt/source.js';
import type { MqttOptions } from '../../adapters/options.js';
import type { Source } from '../../adapters/source.js';
import { atBroker, wantedOn } from '../adapters/mqttOptions.js';
import { RecordingSink, until } from '../adapters/recordingSink.js';
import { Broker } from './broker.js';

// What a broker sends ahead of acknowledgements is bounded, by mosquitto's max_inflight_messages in MQTT 3.1.1 and by the
// client's receive maximum in 5, so that the count of what came shows from outside what was acknowledged.

/** A sink whose readings are durable when the test says so. */
class SlowDisk extends RecordingSink {
  asked = 0;
  private waiting: { resolve: () => void; reject: (error: Error) => void }[] = [];
  private open = false;

  override durable(): Promise<void> {
    this.asked++;
    if (this.open) return Promise.resolve();
    return new Promise((resolve, reject) => this.waiting.push({ resolve, reject }));
  }

  /** All that was asked for is durable, and all to come. */
  store(): void {
    this.open = true;
    for (const { resolve } of this.waiting.splice(0)) resolve();
  }

  fail(): void {
    for (const { reject } of this.waiting.splice(0)) reject(new Error('no space left on device'));
  }
}

describe.each(['3.1.1', '5'] as const)('at QoS 1 the broker keeps a message until what it led to is durable, MQTT %s', (protocol) => {
  let broker: Broker;
  let publisher: MqttClient;
  let source: Source;
  let options: MqttOptions;
  let disk: SlowDisk;

  const ahead = protocol === '5' ? UNDER_WAY : 5;
  const all = 2 * ahead + 3;

  const run = async (keepalive = 15_000): Promise<void> => {
    broker = await Broker.start({ lines: ['max_inflight_messages 5'] });
    publisher = await broker.publisher();
    disk = new SlowDisk();
    options = atBroker(broker.url, { protocol, qos: 1, keepalive });
    source = mqttSource('bus', options, [wantedOn('cell/flow')]);
    source.start(disk);
    await until(() => disk.is('open'), 'it is connected');
  };
  const publish = async (from: number, to: number): Promise<void> => {
    await Promise.all(Array.from({ length: to - from + 1 }, (_, i) => publisher.publishAsync('cell/flow', String(from + i), { qos: 1 })));
  };
  const oneTo = (n: number): number[] => Array.from({ length: n }, (_, i) => i + 1);

  afterEach(async () => {
    disk.store();
    await source.stop();
    await publisher.endAsync(true);
    await broker.dispose();
  });

  it('acknowledges nothing before, and all after', async () => {
    await run();
    await publish(1, all);
    await until(() => disk.readings.length === ahead, 'as many have come as may');
    await sleep(200);
    expect(disk.values()).toEqual(oneTo(ahead));
    disk.store();
    await until(() => disk.readings.length >= all, 'all have come');
    expect(disk.values()).toEqual(oneTo(all));
  });

  it('answers pings and reads on while the disk is slow', async () => {
    await run(1000);
    await publish(1, 2);
    await until(() => disk.readings.length === 2, 'two have come');
    await sleep(2500); // mosquitto drops a client that is silent for one and a half keep-alives
    await publish(3, 4);
    await until(() => disk.readings.length === 4, 'two more have come');
    expect(disk.phases.map(({ phase }) => phase)).toEqual(['connecting', 'open']);
  });

  it('drops the connection when it cannot be stored; the broker sends it again, and the engine takes it once', async () => {
    await run();
    await publish(1, all);
    await until(() => disk.readings.length === ahead, 'as many have come as may');
    disk.fail();
    await until(() => disk.phases.some(({ phase, sentence }) => phase === 'lost' && /could not be stored/.test(sentence)), 'the fault is told');
    await until(() => disk.is('open') && disk.count('repeated') >= ahead, 'they were sent again');
    disk.store();
    await until(() => disk.readings.length >= all, 'all have come');
    await sleep(100);
    expect(disk.values()).toEqual(oneTo(all));
    expect(disk.count('repeated')).toBe(ahead);
  });

  it('leaves to the next run what was not stored when it stopped', async () => {
    await run();
    await publish(1, all);
    await until(() => disk.readings.length === ahead, 'as many have come as may');
    const before = performance.now();
    await source.stop();
    expect(performance.now() - before).toBeLessThan(3500);
    disk = new SlowDisk();
    disk.store();
    source = mqttSource('bus', options, [wantedOn('cell/flow')]);
    source.start(disk);
    await until(() => disk.readings.length >= all, 'all have come');
    expect(disk.values()).toEqual(oneTo(all));
  });
});
