import { execFileSync } from 'node:child_process';
import { once } from 'node:events';
import { readFileSync, writeFileSync } from 'node:fs';
import { createServer, type AddressInfo, type Server, type Socket } from 'node:net';
import { join } from 'node:path';
import { setTimeout as sleep } from 'node:timers/promises';
import { Aedes } from 'aedes';
import { afterEach, describe, expect, it, vi } from 'vitest';
import { mqttSource } from '../../adapters/mqtt/source.js';
import type { MqttOptions } from '../../adapters/options.js';
import type { Source } from '../../adapters/source.js';
import { atBroker, wantedOn } from '../adapters/mqttOptions.js';
import { RecordingSink, until } from '../adapters/recordingSink.js';
import { Broker, freePort } from './broker.js';

const PASSWORD = 'correct-horse-7';

describe('what keeps a broker from serving is said in a sentence', () => {
  const opened: (() => Promise<unknown>)[] = [];
  const sinks: RecordingSink[] = [];

  afterEach(async () => {
    vi.unstubAllEnvs();
    for (const close of opened.splice(0).reverse()) await close();
    for (const { phases, faults } of sinks.splice(0)) expect(JSON.stringify([phases, faults])).not.toContain(PASSWORD);
  });

  const connect = (url: string, more: Partial<MqttOptions> = {}, topics = ['cell/flow']): { sink: RecordingSink; source: Source; options: MqttOptions } => {
    const sink = new RecordingSink();
    const options = atBroker(url, more);
    const source = mqttSource('bus', options, topics.map((topic, slot) => wantedOn(topic, { slot })));
    source.start(sink);
    opened.push(() => source.stop());
    sinks.push(sink);
    return { sink, source, options };
  };
  const told = (sink: RecordingSink, what: RegExp, within?: number): Promise<void> =>
    until(() => sink.phases.some(({ sentence }) => what.test(sentence)), `${what} is told`, within).catch((error: unknown) => {
      throw new Error(`${String(error)}\n${sink.phases.map(({ sentence }) => sentence).join('\n')}`);
    });
  const guarded = async (): Promise<Broker> => {
    const broker = await Broker.start({ anonymous: false, lines: ['password_file FOLDER/passwords'], files: { passwords: '' } });
    opened.push(() => broker.dispose());
    execFileSync('mosquitto_passwd', ['-b', join(broker.folder, 'passwords'), 'kilter', PASSWORD]);
    await broker.kill();
    await broker.start();
    return broker;
  };
  /** A server that is no broker of ours. */
  const serve = async (answer: (socket: Socket) => void): Promise<string> => {
    const sockets = new Set<Socket>();
    const server: Server = createServer((socket) => {
      sockets.add(socket);
      socket.on('error', () => undefined);
      answer(socket);
    }).listen(0, '127.0.0.1');
    await once(server, 'listening');
    opened.push(async () => {
      for (const socket of sockets) socket.destroy();
      server.close();
      await once(server, 'close');
    });
    return `mqtt://127.0.0.1:${(server.address() as AddressInfo).port}`;
  };

  it.each(['3.1.1', '5'] as const)('a wrong password, and the right one serves; MQTT %s', async (protocol) => {
    const broker = await guarded();
    vi.stubEnv('KILTER_TEST_USER', 'kilter');
    const file = join(broker.folder, 'password');
    writeFileSync(file, `${PASSWORD}\n`);
    const right = connect(broker.url, { protocol, user: { env: 'KILTER_TEST_USER' }, password: { file } });
    await until(() => right.sink.is('open'), 'the right one serves');
    writeFileSync(file, `${PASSWORD}x`);
    const wrong = connect(broker.url, { protocol, user: { env: 'KILTER_TEST_USER' }, password: { file } });
    const none = connect(broker.url, { protocol });
    await told(wrong.sink, /refuses the connection: .*look at user(, | and )password/);
    await told(none.sink, /refuses the connection: .*look at user(, | and )password/);
    expect(readFileSync(file, 'utf8')).toContain(PASSWORD); // or nothing could have leaked
  });

  it('and when the broker is mended, it serves without a restart', async () => {
    const broker = await guarded();
    const { sink } = connect(broker.url);
    await told(sink, /refuses the connection/);
    await broker.kill();
    const configuration = join(broker.folder, 'mosquitto.conf');
    writeFileSync(configuration, readFileSync(configuration, 'utf8').replace('allow_anonymous false', 'allow_anonymous true'));
    await broker.start();
    await until(() => sink.is('open'), 'it serves');
  });

  it('nobody at the port', async () => {
    const { sink } = connect(`mqtt://127.0.0.1:${await freePort()}`);
    await told(sink, /Nobody answers at mqtt:\/\/127\.0\.0\.1:\d+/);
    await sleep(300);
    expect(sink.phases.filter(({ sentence }) => /Nobody answers/.test(sentence))).toHaveLength(1); // said once, not at every attempt
    expect(sink.phases.map(({ phase }) => phase)).toEqual(['connecting', 'connecting']);
  });

  it('a host that is not known', async () => {
    const { sink } = connect('mqtt://no-such-host.invalid'); // RFC 2606: never a name
    await told(sink, /The host of mqtt:\/\/no-such-host\.invalid is not known/, 30_000);
  });

  it('topics that it refuses, while the others are served, and are served themselves when it is mended', async () => {
    let refuses = true;
    const broker = await Aedes.createBroker({
      authorizeSubscribe: (_, subscription, done) => done(null, refuses && subscription.topic.startsWith('secret') ? null : subscription),
    });
    const url = await serve((socket) => broker.handle(socket));
    opened.push(() => new Promise<void>((resolve) => broker.close(() => resolve())));
    const { sink } = connect(url, {}, ['cell/flow', 'secret/flow']);
    await told(sink, /Connected to .*, which refuses 'secret\/flow': look at its access rules/);
    const publish = (topic: string): void =>
      broker.publish({ cmd: 'publish', topic, payload: Buffer.from('41'), qos: 0, retain: false, dup: false }, () => undefined);
    publish('cell/flow');
    await until(() => sink.values().length > 0, 'the other is served');
    refuses = false;
    await told(sink, /^Connected to [^ ]*\.$/);
    publish('secret/flow');
    await until(() => sink.values(1).length > 0, 'it is served too');
  });

  it('another client under the same identifier', async () => {
    const broker = await Broker.start();
    opened.push(() => broker.dispose());
    const one = connect(broker.url);
    const other = connect(broker.url, one.options);
    const asked = (sink: RecordingSink): boolean => sink.phases.some(({ sentence }) => /does another client use the identifier 'kilter-test-/.test(sentence));
    await until(() => asked(one.sink) || asked(other.sink), 'the question is asked');
  });

  it.each([
    [0x8e, /another client has taken over this client identifier: give each client its own clientId/],
    [0x8b, /has ended the connection: it is shutting down/],
    [0xa0, /has ended the connection: reason 160/],
  ])('a good-bye with its reason (MQTT 5, 3.14): %d', async (reason, sentence) => {
    const CONNACK = [0x20, 0x03, 0x00, 0x00, 0x00];
    const url = await serve((socket) => socket.once('data', () => socket.end(Buffer.of(...CONNACK, 0xe0, 0x01, reason))));
    await told(connect(url, { protocol: '5' }).sink, sentence);
  });

  it('a broker that freezes', async () => {
    const broker = await Broker.start();
    opened.push(() => broker.dispose());
    const { sink } = connect(broker.url, { keepalive: 1000 });
    await until(() => sink.is('open'), 'it is connected');
    broker.pause();
    await told(sink, /does not answer any more/);
    broker.proceed();
    await until(() => sink.is('open'), 'it is connected again');
  });

  it.each<[string, (socket: Socket) => void]>([
    ['another protocol', (socket) => socket.write('220 mail.example ESMTP\r\n')],
    ['nonsense', (socket) => socket.write(Buffer.alloc(5000, 0xf7))],
    ['nothing but an end', (socket) => socket.end()],
    ['a half packet and an end', (socket) => socket.end(Buffer.of(0x20, 0x02, 0x00))],
    ['a packet of 256 MB announced', (socket) => socket.write(Buffer.of(0x30, 0xff, 0xff, 0xff, 0x7f, 0))],
    ['nonsense after a good beginning', (socket) => socket.write(Buffer.concat([Buffer.of(0x20, 0x02, 0, 0), Buffer.alloc(500, 0xff)]))],
  ])('a server that speaks %s: no reading, no crash, and it stops at once', async (_, answer) => {
    const url = await serve((socket) => socket.once('data', () => answer(socket)));
    const { sink, source } = connect(url);
    await sleep(400);
    expect(sink.readings).toEqual([]);
    expect(sink.phases.some(({ phase }) => phase === 'open')).toBe(false);
    const before = performance.now();
    await source.stop();
    expect(performance.now() - before).toBeLessThan(2500);
  });

  it('waits longer from attempt to attempt, up to a bound', async () => {
    const at: number[] = [];
    const url = await serve((socket) => {
      at.push(performance.now());
      socket.destroy();
    });
    connect(url, { retryFrom: 40, retryTo: 160 });
    await until(() => at.length >= 7, 'it has tried seven times');
    const waits = at.slice(1).map((time, i) => time - at[i]!);
    const doubled = [40, 80, 160, 160, 160, 160];
    for (const [i, wait] of waits.slice(0, 6).entries()) expect(wait).toBeGreaterThan(doubled[i]! * 0.75 - 3); // jitter of a quarter
    expect(new Set(waits.slice(2, 6).map(Math.round)).size).toBeGreaterThan(1); // and it varies
  });
});
