import mqtt, { type IClientOptions, type IPublishPacket, type MqttClient } from 'mqtt';
import { clean } from '../../src/text/clean.js';
import type { MqttOptions } from '../options.js';
import type { Sink, Source, Wanted } from '../source.js';
import { Acknowledger } from './acknowledge.js';
import { isText, Tap } from './payload.js';
import { Routes } from './routes.js';
import { fetchSecret, readOrSay } from './secret.js';
import { brokerName, connectionTrouble } from './trouble.js';

const CONNECT_WITHIN = 10_000; // ms
const STOP_WITHIN = 1000; // ms for acknowledgements and the good-bye

/**
 * Readings from an MQTT broker, 3.1.1 or 5, over TCP or TLS. The session is kept by the broker over lost connections, so
 * that at QoS 1 nothing is missed; a message is acknowledged once the alarms it led to are on disk. A retained message
 * at subscription is old news: shown, not judged.
 * @throws UserError where a secret or certificate is not there, or a pointer is none
 */
export function mqttSource(name: string, options: MqttOptions, wanted: readonly Wanted[]): Source {
  return new MqttSource(name, options, wanted);
}

class MqttSource implements Source {
  readonly ended: Promise<void>;
  private finished!: () => void;
  private readonly routes: Routes<Tap>;
  private readonly client: MqttClient;
  private readonly numbers = new Float64Array(2);
  private sink: Sink | null = null;
  private acknowledger: Acknowledger | null = null;
  private retry: NodeJS.Timeout | undefined;
  private backOff: number;
  private trouble: string | null = null;
  private stopping: Promise<void> | null = null;

  constructor(
    readonly name: string,
    private readonly options: MqttOptions,
    wanted: readonly Wanted[],
  ) {
    this.ended = new Promise((resolve) => (this.finished = resolve));
    this.routes = new Routes(wanted.map((channel) => new Tap(channel)));
    this.backOff = options.retryFrom;
    // Made now, so that a missing file or variable is said before anything runs; it connects at start.
    this.client = mqtt.connect(options.url, clientOptions(name, options));
    this.client.on('error', (error) => (this.trouble = connectionTrouble(error, options.url)));
  }

  start(sink: Sink): void {
    if (this.sink || this.stopping) return;
    this.sink = sink;
    const { client, options } = this;
    this.acknowledger = new Acknowledger(
      client,
      () => sink.durable(),
      () => client.stream.destroy(),
    );
    client.on('connect', () => this.subscribe());
    client.on('close', () => this.lost());
    client.handleMessage = (packet, done) => this.take(packet, done);
    queueMicrotask(() => {
      if (this.stopping) return;
      sink.phase('connecting', `Connecting to ${brokerName(options.url)}.`);
      client.connect();
    });
  }

  stop(): Promise<void> {
    this.stopping ??= this.end();
    return this.stopping;
  }

  private async end(): Promise<void> {
    clearTimeout(this.retry);
    const { client, acknowledger } = this;
    const until = performance.now() + STOP_WITHIN;
    while (client.connected && (acknowledger?.pending ?? 0) > 0 && performance.now() < until) await pause(10);
    const { sink } = this;
    this.sink = null;
    acknowledger?.drop();
    // end() waits for ever while a message is under way and nobody is there: it is given a moment, then forced
    await Promise.race([client.endAsync().catch(() => undefined), pause(client.connected ? STOP_WITHIN : 0)]);
    await Promise.race([client.endAsync(true).catch(() => undefined), pause(200)]);
    sink?.phase('stopped', `No longer connected to ${brokerName(this.options.url)}.`);
    this.finished();
  }

  private subscribe(): void {
    const { client, options, sink } = this;
    this.backOff = options.retryFrom;
    this.trouble = null;
    const filters = Object.fromEntries(this.routes.filters.map((filter) => [filter, { qos: options.qos }]));
    client.subscribe(filters, (error, granted) => {
      if (!this.sink) return;
      const refused = [...(granted ?? [])].filter(({ qos }) => qos >= 128).map(({ topic }) => clean(topic, 80));
      if (error && refused.length === 0) {
        this.trouble = `${brokerName(options.url)} does not take the subscription: ${clean(error.message, 120)}`;
        client.stream.destroy();
      } else if (refused.length > 0)
        sink?.phase('open', `Connected to ${brokerName(options.url)}, which refuses the topics ${refused.join(', ')}: look at its access rules.`);
      else sink?.phase('open', `Connected to ${brokerName(options.url)}.`);
    });
  }

  private lost(): void {
    this.acknowledger?.drop();
    const { sink, options } = this;
    if (!sink || this.stopping) return;
    sink.phase('lost', `${this.trouble ?? `The connection to ${brokerName(options.url)} is lost.`} Trying again.`);
    this.trouble = null;
    clearTimeout(this.retry);
    this.retry = setTimeout(() => {
      if (!this.stopping) this.client.reconnect();
    }, this.backOff * (0.75 + Math.random() * 0.5));
    this.backOff = Math.min(this.backOff * 2, options.retryTo);
  }

  private take(packet: IPublishPacket, done: (error?: Error) => void): void {
    try {
      if (this.sink) this.deliver(packet, this.sink);
    } catch (error) {
      // A throw here would stop the client's pump for good while it still says that it is connected.
      this.sink?.fault('bad-json', `fault in the message handler: ${String(error)}`);
    }
    if (packet.qos === 0 || packet.messageId === undefined || !this.acknowledger) {
      done();
      return;
    }
    done(LATER);
    this.acknowledger.add(packet.messageId);
  }

  private deliver({ topic, payload: raw, retain }: IPublishPacket, sink: Sink): void {
    const payload = typeof raw === 'string' ? Buffer.from(raw) : raw;
    const taps = this.routes.to(topic);
    if (taps.length === 0) return;
    if (payload.length > this.options.maxPayload) { sink.fault('too-long', payload.toString('latin1', 0, 60)); return; }
    if (!isText(payload)) { sink.fault('bad-bytes', payload.toString('latin1', 0, 60)); return; }
    let document: unknown;
    let parsed = false;
    for (const tap of taps) {
      let fault;
      if (tap.needsJson) {
        if (!parsed) {
          try {
            document = JSON.parse(payload.toString('utf8'));
            parsed = true;
          } catch {
            sink.fault('bad-json', payload.toString('utf8', 0, 60)); return;
          }
        }
        fault = tap.json(document, topic, this.numbers);
      } else {
        this.numbers[1] = NaN;
        fault = tap.plain(payload, this.numbers);
      }
      if (fault !== null) {
        sink.fault(fault, payload.toString('utf8', 0, 60));
        continue;
      }
      const value = this.numbers[0]!;
      const own = this.numbers[1]!;
      const time = own === own ? own : sink.now();
      if (retain) {
        sink.stale(tap.wanted.slot, time, value);
        sink.fault('stale', topic);
      } else sink.reading(tap.wanted.slot, time, value);
    }
  }
}

const LATER = new Error('acknowledged when it is durable');

const pause = (ms: number): Promise<void> => new Promise((resolve) => setTimeout(resolve, ms));

function clientOptions(name: string, options: MqttOptions): IClientOptions {
  const { protocol, clientId, keepalive, ca, cert, key } = options;
  const user = fetchSecret(options.user, 'user name', name);
  const password = fetchSecret(options.password, 'password', name);
  const pem = (file: string | null, what: string): Buffer | undefined => (file === null ? undefined : readOrSay(file, `${what} of the source ${clean(name, 60)}`));
  const own = { ca: pem(ca, 'authority'), cert: pem(cert, 'certificate'), key: pem(key, 'key') };
  return {
    manualConnect: true,
    protocolVersion: protocol === '5' ? 5 : 4,
    clientId,
    clean: false,
    keepalive: Math.max(1, Math.round(keepalive / 1000)),
    connectTimeout: CONNECT_WITHIN,
    reconnectPeriod: 0, // the waits between attempts are ours: doubled, capped, with jitter
    reconnectOnConnackError: true,
    resubscribe: false, // on every connect all filters are subscribed to, whatever the broker remembers
    queueQoSZero: false,
    ...(protocol === '5' && { properties: { sessionExpiryInterval: 86_400 } }),
    ...(user !== null && { username: user }),
    ...(password !== null && { password }),
    ...(own.ca && { ca: own.ca }),
    ...(own.cert && { cert: own.cert }),
    ...(own.key && { key: own.key }),
  };
}
