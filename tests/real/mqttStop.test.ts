import { afterEach, describe, expect, it } from 'vitest';
import { mqttSource } from '../../adapters/mqtt/source.js';
import type { Source } from '../../adapters/source.js';
import { atBroker, wantedOn } from '../adapters/mqttOptions.js';
import { RecordingSink, until } from '../adapters/recordingSink.js';
import { Broker, freePort } from './broker.js';

const AT_MOST = 2000; // ms
const SLACK = 500; // ms that a busy machine may take

/** A sink whose readings are never durable. */
class StuckDisk extends RecordingSink {
  override durable(): Promise<void> {
    return new Promise(() => undefined);
  }
}

async function timeToStop(source: Source, sink: RecordingSink): Promise<number> {
  const before = performance.now();
  await source.stop();
  const took = performance.now() - before;
  expect(sink.is('stopped')).toBe(true);
  return took;
}

describe('an MQTT source stops within two seconds', () => {
  let broker: Broker | null = null;

  afterEach(async () => {
    broker?.proceed();
    await broker?.dispose();
    broker = null;
  });

  it('where there has never been a broker', async () => {
    const sink = new RecordingSink();
    const source = mqttSource('bus', atBroker(`mqtt://127.0.0.1:${await freePort()}`), [wantedOn('cell/flow')]);
    source.start(sink);
    await until(() => sink.phases.some(({ sentence }) => sentence.includes('Nobody answers')), 'it was said that nobody answers');
    expect(await timeToStop(source, sink)).toBeLessThan(AT_MOST + SLACK);
  });

  it('where the broker has gone in the middle', async () => {
    broker = await Broker.start();
    const sink = new RecordingSink();
    const source = mqttSource('bus', atBroker(broker.url), [wantedOn('cell/flow')]);
    source.start(sink);
    await until(() => sink.is('open'), 'it is connected');
    await broker.kill();
    await until(() => sink.is('lost'), 'the loss was told');
    expect(await timeToStop(source, sink)).toBeLessThan(AT_MOST + SLACK);
  });

  it('where the broker has frozen', async () => {
    broker = await Broker.start();
    const sink = new RecordingSink();
    const source = mqttSource('bus', atBroker(broker.url), [wantedOn('cell/flow')]);
    source.start(sink);
    await until(() => sink.is('open'), 'it is connected');
    broker.pause();
    expect(await timeToStop(source, sink)).toBeLessThan(AT_MOST + SLACK);
  });

  it('where the broker has frozen, and what came cannot be stored either', async () => {
    broker = await Broker.start();
    const publisher = await broker.publisher();
    const sink = new StuckDisk();
    const source = mqttSource('bus', atBroker(broker.url), [wantedOn('cell/flow')]);
    source.start(sink);
    await until(() => sink.is('open'), 'it is connected');
    await publisher.publishAsync('cell/flow', '41.2', { qos: 1 });
    await until(() => sink.readings.length === 1, 'a reading has come');
    broker.pause();
    expect(await timeToStop(source, sink)).toBeLessThan(AT_MOST + SLACK);
    broker.proceed();
    await publisher.endAsync(true);
  });
});
