import { afterEach, describe, expect, it } from 'vitest';
import type { MqttClient } from 'mqtt';
import { mqttSource } from '../../adapters/mqtt/source.js';
import type { Source } from '../../adapters/source.js';
import { atBroker, wantedOn } from '../adapters/mqttOptions.js';
import { RecordingSink, until } from '../adapters/recordingSink.js';
import { Broker } from './broker.js';

describe.each(['3.1.1', '5'] as const)('a retained message is old news, MQTT %s', (protocol) => {
  let broker: Broker;
  let publisher: MqttClient;
  let source: Source;
  const sink = (): RecordingSink => current;
  let current: RecordingSink;

  const run = async (): Promise<void> => {
    broker = await Broker.start();
    publisher = await broker.publisher();
    await publisher.publishAsync('cell/flow', '{"v":40.5,"n":7}', { qos: 1, retain: true });
    current = new RecordingSink();
    source = mqttSource('bus', atBroker(broker.url, { protocol }), [wantedOn('cell/flow', { slot: 3, value: '/v', sequence: '/n' })]);
    source.start(current);
    await until(() => sink().is('open') && sink().staleReadings.length > 0, 'the old value has come');
  };

  afterEach(async () => {
    await source.stop();
    await publisher.endAsync(true);
    await broker.dispose();
  });

  it('at subscription: shown, counted, not judged', async () => {
    await run();
    expect(sink().staleReadings).toMatchObject([{ slot: 3, value: 40.5 }]);
    expect(sink().readings).toEqual([]);
    expect(sink().count('stale')).toBe(1);
  });

  it('but one published with the retain flag while we listen is a reading', async () => {
    await run();
    await publisher.publishAsync('cell/flow', '{"v":41,"n":8}', { qos: 1, retain: true });
    await until(() => sink().readings.length > 0, 'it has come');
    expect(sink().values(3)).toEqual([41]);
    expect(sink().staleReadings).toHaveLength(1);
  });

  it('takes no number from the sequence: the same message comes as a reading when it is sent as one', async () => {
    await run();
    await publisher.publishAsync('cell/flow', '{"v":40.5,"n":7}', { qos: 1 });
    await until(() => sink().readings.length > 0, 'it has come');
    expect(sink().values(3)).toEqual([40.5]);
  });

  it('is no reading after a reconnection either', async () => {
    await run();
    await broker.kill();
    await until(() => sink().is('lost'), 'the loss is told');
    await broker.start();
    await until(() => sink().is('open') && publisher.connected, 'both are back');
    await publisher.publishAsync('cell/flow', '{"v":42,"n":9}', { qos: 1 });
    await until(() => sink().readings.length > 0, 'a new reading has come');
    expect(sink().values(3)).toEqual([42]);
  });
});
