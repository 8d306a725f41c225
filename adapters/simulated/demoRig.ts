import { once } from 'node:events';
import { createServer, type AddressInfo } from 'node:net';
import { PassThrough } from 'node:stream';
import { Aedes } from 'aedes';
import mqtt, { type MqttClient } from 'mqtt';
import { INSTRUMENTS, instrumentAt, readingAt } from './cell.js';
import { LINE_CHANNELS, MQTT_CHANNELS, pointerOf, topicOf } from './demoChannels.js';
import { EVERY, faultToTell } from './schedule.js';

const BEHIND = 20; // steps that are made up for after a pause; what lies further back is left out, as real time leaves it out
const UNREAD = 65_536; // bytes of lines that may wait for a reader


export interface DemoRig {
  /** Address of the embedded broker. */
  readonly url: string;
  /** Lines of csv as a serial logger would send them. Lines that nobody reads are dropped beyond 64 KiB. */
  readonly lineStream: PassThrough;
  /** Names of the columns of those lines. */
  readonly columns: readonly string[];
  /** What is wrong with the cell at the moment, in plain words; null while nothing is. */
  faultNow(): string | null;
  /** Ends everything. Safe to call twice. */
  stop(): Promise<void>;
}

/**
 * The simulated cell on real transports: a broker on the loopback interface with a real client that publishes to it over
 * TCP, and a stream of lines. Nothing is reachable from outside.
 */
export async function startDemoRig({ seed }: { readonly seed: number }): Promise<DemoRig> {
  const broker = await Aedes.createBroker();
  const server = createServer((socket) => broker.handle(socket));
  server.listen(0, '127.0.0.1');
  await once(server, 'listening');
  const url = `mqtt://127.0.0.1:${(server.address() as AddressInfo).port}`;
  const client = await mqtt.connectAsync(url, { clientId: 'cell3', reconnectPeriod: 500 });
  client.on('error', () => undefined); // it connects again by itself
  const lineStream = new PassThrough();
  const began = performance.now();
  let step = 0;
  const timer = setInterval(() => {
    const due = Math.floor((performance.now() - began) / EVERY);
    step = Math.max(step, due - BEHIND);
    for (; step <= due; step++) {
      publish(client, seed, step);
      if (lineStream.writableLength + lineStream.readableLength < UNREAD) lineStream.write(lineAt(seed, step));
    }
  }, EVERY / 4);
  const end = async (): Promise<void> => {
    clearInterval(timer);
    lineStream.end();
    await client.endAsync(true);
    await new Promise<void>((resolve) => broker.close(() => resolve()));
    await new Promise<void>((resolve) => server.close(() => resolve()));
  };
  let stopping: Promise<void> | null = null;
  return {
    url,
    lineStream,
    columns: LINE_CHANNELS,
    faultNow: () => faultToTell(Math.max(0, step - 1))?.sentence ?? null,
    stop: () => (stopping ??= end()),
  };
}

function publish(client: MqttClient, seed: number, step: number): void {
  if (!client.connected) return; // nothing is kept for later: it would arrive as if it were new
  for (const channel of MQTT_CHANNELS) {
    const i = instrumentAt(channel);
    const value = readingAt(seed, i, step, true);
    if (value === null) continue;
    const payload = pointerOf(channel) === null ? String(value) : JSON.stringify({ value, unit: INSTRUMENTS[i]!.unit });
    client.publish(topicOf(channel), payload, { qos: 1 });
  }
}

/** A field is empty where its instrument sends nothing. */
function lineAt(seed: number, step: number): string {
  return `${LINE_CHANNELS.map((channel) => readingAt(seed, instrumentAt(channel), step, true) ?? '').join(',')}\n`;
}
