import { setTimeout as sleep } from 'node:timers/promises';
import { afterEach, describe, expect, it } from 'vitest';
import type { MqttClient } from 'mqtt';
import { mqttSource } from '../../adapters/mqtt/source.js';
import type { MqttOptions } from '../../adapters/options.js';
import type { Source } from '../../adapters/source.js';
import { atBroker, wantedOn } from '../adapters/mqttOptions.js';
import { RecordingSink, until } from '../adapters/recordingSink.js';
import { Broker } from './broker.js';

// A real mosquitto is killed with SIGKILL in the middle of a run and started again on its own files.

describe.each(['3.1.1', '5'] as const)('a broker that is killed and comes back, MQTT %s', (protocol) => {
  let broker: Broker;
  let publisher: MqttClient;
  let source: Source | null = null;
  let options: MqttOptions;
  let sink: RecordingSink;

  const run = async (qos: 0 | 1): Promise<void> => {
    broker = await Broker.start();
    publisher = await broker.publisher();
    sink = new RecordingSink();
    options = atBroker(broker.url, { protocol, qos });
    source = mqttSource('bus', options, [wantedOn('cell/flow')]);
    source.start(sink);
    await until(() => sink.is('open'), 'it is connected');
  };
  const publish = async (from: number, to: number, qos: 0 | 1): Promise<void> => {
    for (let k = from; k < to; k++) await publisher.publishAsync('cell/flow', String(k), { qos });
  };
  const oneTo = (n: number): number[] => Array.from({ length: n }, (_, i) => i + 1);

  afterEach(async () => {
    await source?.stop();
    await publisher.endAsync(true);
    await broker.dispose();
  });

  it('is said to be lost, found again and subscribed to again; readings go on, and none is invented', async () => {
    await run(0);
    await publish(1, 101, 0);
    await until(() => sink.readings.length === 100, 'the first hundred have come');
    await broker.kill();
    await until(() => sink.is('lost'), 'the loss is told');
    await until(() => /Nobody answers/.test(sink.phases.at(-1)!.sentence), 'what is wrong is told');
    await broker.start();
    await until(() => sink.is('open'), 'it is connected again');
    await until(() => publisher.connected, 'the publisher is back');
    await publish(101, 201, 0);
    await until(() => sink.readings.length >= 200, 'the second hundred have come');
    expect(sink.values()).toEqual(oneTo(200));
    expect(sink.faults).toEqual([]);
  });

  it('loses nothing at QoS 1 that was published while kilter was away, and takes nothing twice', async () => {
    await run(1);
    await publish(1, 51, 1);
    await until(() => sink.readings.length === 50, 'the first fifty have come');
    // Nothing listens for a while: the broker is there, kilter is not.
    await source!.stop();
    await publish(51, 101, 1);
    await sleep(300); // mosquitto writes to its disk a moment after it has acknowledged
    await broker.kill();
    await broker.start();
    source = mqttSource('bus', options, [wantedOn('cell/flow')]);
    const before = sink.values();
    sink = new RecordingSink();
    source.start(sink);
    await until(() => sink.readings.length >= 50, 'what was kept has come');
    await sleep(100);
    expect([...before, ...sink.values()]).toEqual(oneTo(100));
  });

  it('is killed again and again under load at QoS 1: every reading that was accepted comes, each once', async () => {
    await run(1);
    let accepted = 0;
    const publishing = (async () => {
      for (let k = 1; k <= 600; k++) {
        await publisher.publishAsync('cell/flow', String(k), { qos: 1 }); // resolves when the broker has it
        accepted = k;
      }
    })();
    for (const share of [100, 250, 400]) {
      await until(() => accepted >= share, `${share} were published`);
      await broker.kill();
      await sleep(50);
      await broker.start();
    }
    await publishing;
    const all = (): Set<number> => new Set(sink.values());
    await until(() => all().size >= 600, 'all have come');
    await sleep(100);
    expect([...all()].toSorted((a, b) => a - b)).toEqual(oneTo(600));
    // The publisher itself repeats what it does not know to have arrived, as a message of its own: at most one by kill here.
    expect(sink.values().length).toBeLessThanOrEqual(603);
  });
});
