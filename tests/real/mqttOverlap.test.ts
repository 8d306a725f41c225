import { setTimeout as sleep } from 'node:timers/promises';
import { afterEach, describe, expect, it } from 'vitest';
import type { MqttClient } from 'mqtt';
import { mqttSource } from '../../adapters/mqtt/source.js';
import type { Source } from '../../adapters/source.js';
import { atBroker, wantedOn } from '../adapters/mqttOptions.js';
import { RecordingSink, until } from '../adapters/recordingSink.js';
import { Broker } from './broker.js';

describe.each(['3.1.1', '5'] as const)('each channel takes each message once, MQTT %s', (protocol) => {
  let broker: Broker;
  let publisher: MqttClient;
  let source: Source;

  afterEach(async () => {
    await source.stop();
    await publisher.endAsync(true);
    await broker.dispose();
  });

  it('whatever the filters of the channels have in common', async () => {
    broker = await Broker.start();
    publisher = await broker.publisher();
    const sink = new RecordingSink();
    const topics = ['cell/+/flow', 'cell/3/+', 'cell/3/flow', 'cell/#', 'cell/3/flow', 'other'];
    source = mqttSource('bus', atBroker(broker.url, { protocol }), topics.map((topic, slot) => wantedOn(topic, { slot })));
    source.start(sink);
    await until(() => sink.is('open'), 'it is connected');
    for (const [topic, value] of [['cell/3/flow', 1], ['cell/4/flow', 2], ['cell/3/inlet', 3], ['cell', 4], ['other', 5]] as const)
      await publisher.publishAsync(topic, String(value), { qos: 1 });
    await until(() => sink.values(5).length > 0, 'the last has come');
    await sleep(50);
    expect(topics.map((_, slot) => sink.values(slot))).toEqual([[1, 2], [1, 3], [1], [1, 2, 3, 4], [1], [5]]);
  });

  it('also when the session still has the subscription of an older stand', async () => {
    broker = await Broker.start();
    publisher = await broker.publisher();
    const options = atBroker(broker.url, { protocol });
    const older = mqttSource('bus', options, [wantedOn('cell/+')]);
    const first = new RecordingSink();
    older.start(first);
    await until(() => first.is('open'), 'the older stand is connected');
    await older.stop();
    const sink = new RecordingSink();
    source = mqttSource('bus', options, [wantedOn('cell/flow')]);
    source.start(sink);
    await until(() => sink.is('open'), 'the stand is connected');
    for (const value of [1, 1, 2, 3]) await publisher.publishAsync('cell/flow', String(value), { qos: 1 });
    await until(() => sink.values().includes(3), 'the last has come');
    await sleep(50);
    expect(sink.values()).toEqual([1, 1, 2, 3]);
  });
});
