import { once } from 'node:events';
import { createServer, type AddressInfo } from 'node:net';
import { PassThrough } from 'node:stream';
import { Aedes } from 'aedes';
import mqtt from 'mqtt';
import { EVERY, faultAt, INSTRUMENTS, readingAt } from './cell.js';

/** How the demo's channels reach it: three over MQTT (one as a bare number, two as JSON), three on a line like a logger's. */
export const MQTT_CHANNELS = ['bearing', 'vibration', 'supply'] as const;
export const LINE_CHANNELS = ['flow', 'inlet', 'outlet'] as const;

export const topicOf = (channel: string): string => `cell3/${channel}`;
/** JSON Pointer into the payload; null where the payload is the number. */
export const pointerOf = (channel: string): string | null => (channel === 'supply' ? null : '/value');

export interface DemoRig {
  /** Address of the embedded broker. */
  readonly url: string;
  /** Lines of csv as a serial logger would send them: LINE_CHANNELS in order. */
  readonly lineStream: PassThrough;
  /** What is wrong with the cell at the moment, in plain words; null while nothing is. */
  faultNow(): string | null;
  stop(): Promise<void>;
}

/**
 * The simulated cell on real transports: a broker on the loopback interface with a real client that publishes to it, and a
 * stream of lines. Nothing is reachable from outside.
 */
export async function startDemoRig({ seed }: { readonly seed: number }): Promise<DemoRig> {
  const broker = await Aedes.createBroker();
  const server = createServer((socket) => broker.handle(socket));
  server.listen(0, '127.0.0.1');
  await once(server, 'listening');
  const url = `mqtt://127.0.0.1:${(server.address() as AddressInfo).port}`;
  const client = await mqtt.connectAsync(url, { clientId: 'cell3', reconnectPeriod: 500 });
  const lineStream = new PassThrough();
  const began = performance.now();
  let step = 0;
  const indexOf = (channel: string): number => INSTRUMENTS.findIndex((instrument) => instrument.channel === channel);
  const tick = (): void => {
    const due = Math.floor((performance.now() - began) / EVERY);
    for (; step <= due; step++) send(step);
  };
  const send = (at: number): void => {
    for (const channel of MQTT_CHANNELS) {
      const value = readingAt(seed, indexOf(channel), at, true);
      if (value === null) continue;
      const payload = pointerOf(channel) === null ? String(value) : JSON.stringify({ value, unit: INSTRUMENTS[indexOf(channel)]!.unit });
      client.publish(topicOf(channel), payload, { qos: 1 });
    }
    lineStream.write(`${LINE_CHANNELS.map((channel) => readingAt(seed, indexOf(channel), at, true)).join(',')}\n`);
  };
  const timer = setInterval(tick, EVERY / 2);
  return {
    url,
    lineStream,
    faultNow: () => faultAt(step)?.sentence ?? null,
    stop: async () => {
      clearInterval(timer);
      lineStream.end();
      await client.endAsync(true);
      await new Promise<void>((resolve) => broker.close(() => resolve()));
      await new Promise<void>((resolve) => server.close(() => resolve()));
    },
  };
}
