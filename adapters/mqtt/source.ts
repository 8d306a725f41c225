import mqtt, { type IConnackPacket, type IPublishPacket, type ISubscriptionMap, type MqttClient } from 'mqtt';
import { clean } from '../../src/text/clean.js';
import type { MqttOptions } from '../options.js';
import type { Sink, Source, SourcePhase, Wanted } from '../source.js';
import { Acknowledger } from './acknowledge.js';
import { brokerAddress } from './address.js';
import { clientOptions } from './clientOptions.js';
import { fingerprint } from './fingerprint.js';
import { Intake } from './intake.js';
import { Redelivery } from './redelivery.js';
import { connectionTrouble, goodbye } from './trouble.js';

const STOP_WITHIN = 1000; // ms for acknowledgements, and as much for the good-bye
const BRIEF = 5000; // ms that a connection lasts at most where two clients of one identifier oust each other
const REFUSED_FROM = 128; // return codes of SUBACK from here on are refusals

/**
 * Readings from an MQTT broker, 3.1.1 or 5, over TCP or TLS. The broker keeps the session over lost connections, so that at
 * QoS 1 nothing is missed; a message is acknowledged once the alarms it led to are on disk, and one that is
 * repeated after a fault is taken once. A retained message at subscription is old news: shown, not judged. The broker
 * may come late, go and come back: the wait between attempts doubles from `retryFrom` to `retryTo` (ms) and varies by a
 * quarter. What is wrong is said in a sentence through `phase`.
 * @throws UserError where the address, a secret, a certificate, a topic or a pointer cannot serve
 */
export function mqttSource(name: string, options: MqttOptions, wanted: readonly Wanted[]): Source {
  return new MqttSource(name, options, wanted);
}

class MqttSource implements Source {
  readonly ended: Promise<void>;
  private finished!: () => void;
  private readonly broker: string;
  private readonly intake: Intake;
  private readonly client: MqttClient;
  private readonly redelivery: Redelivery | null;
  /** Marks what comes by this run's subscriptions (MQTT 5): an older stand may have left others in the session. */
  private readonly subscription: number;
  private marks = false;
  private sink: Sink | null = null;
  private acknowledger: Acknowledger | null = null;
  private retry: NodeJS.Timeout | undefined;
  private wait: number;
  private openSince = NaN;
  private brief = 0; // connections in a row that were cut soon and without a word
  private wasOpen = false;
  private trouble: string | null = null;
  private said = '';
  private stopping: Promise<void> | null = null;

  constructor(
    readonly name: string,
    private readonly options: MqttOptions,
    wanted: readonly Wanted[],
  ) {
    const address = brokerAddress(options.url);
    this.ended = new Promise((resolve) => (this.finished = resolve));
    this.broker = address.label;
    this.intake = new Intake(wanted, options.maxPayload);
    this.redelivery = options.qos === 1 ? new Redelivery() : null;
    this.subscription = 1 + (fingerprint(this.intake.filters.join('\n')) % 268_435_455); // 3.8.2.1.2 of MQTT 5
    this.client = mqtt.connect(clientOptions(name, options, address));
    this.wait = options.retryFrom;
  }

  start(sink: Sink): void {
    if (this.sink || this.stopping) return;
    this.sink = sink;
    const { client } = this;
    this.acknowledger = new Acknowledger(
      client,
      () => sink.durable(),
      () => this.cut(`What came from ${this.broker} could not be stored; it is to be sent again.`),
    );
    client.on('connect', (packet) => this.connected(packet));
    client.on('close', () => this.lost());
    client.on('error', (error) => this.failed(error));
    client.on('disconnect', ({ reasonCode = 0 }) => (this.trouble = goodbye(reasonCode, this.broker)));
    client.handleMessage = (packet, done) => this.take(packet, done);
    this.retry = setTimeout(() => {
      this.say('connecting', `Connecting to ${this.broker}.`);
      this.connect(() => client.connect());
    }, 0);
  }

  stop(): Promise<void> {
    return (this.stopping ??= this.end());
  }

  private connect(attempt: () => void): void {
    try {
      attempt();
    } catch (error) {
      this.trouble = connectionTrouble(error, this.broker);
      this.lost();
    }
  }

  private connected({ sessionPresent, properties }: IConnackPacket): void {
    if (!sessionPresent) this.redelivery?.forget();
    this.marks = this.options.protocol === '5' && properties?.subscriptionIdentifiersAvailable !== false;
    this.subscribe(this.intake.filters);
  }

  private subscribe(filters: readonly string[]): void {
    const { client, options } = this;
    const { qos } = options;
    // Retained messages are wanted once; after a reconnection only where the broker has forgotten us (MQTT 5, 3.8.3.1).
    const each = { qos, ...(options.protocol === '5' && { nl: false, rap: false, rh: this.wasOpen ? 1 : 0 }) };
    const map = Object.fromEntries(filters.map((filter) => [filter, each])) as ISubscriptionMap;
    client.subscribe(map, this.marks ? { qos, properties: { subscriptionIdentifier: this.subscription } } : { qos }, (error, _, packet) => {
      if (!this.stopping && client.connected) this.subscribed(filters, error, packet?.granted as number[] | undefined);
    });
  }

  private subscribed(filters: readonly string[], error: Error | null, granted: readonly number[] = []): void {
    const { broker } = this;
    const refused = filters.filter((_, i) => (granted[i] ?? 0) >= REFUSED_FROM);
    if (error && refused.length === 0) {
      this.cut(`${broker} does not take the subscription: ${clean(error.message, 120)}.`);
      return;
    }
    if (Number.isNaN(this.openSince)) this.openSince = performance.now();
    this.wasOpen = true;
    if (refused.length === 0) this.say('open', `Connected to ${broker}.`);
    else {
      const named = refused.slice(0, 5).map((topic) => `'${clean(topic, 80)}'`);
      this.say('open', `Connected to ${broker}, which refuses ${named.join(', ')}${refused.length > 5 ? ' and more' : ''}: look at its access rules.`);
      this.retry = setTimeout(() => this.subscribe(refused), this.options.retryTo); // they may be mended while it runs
    }
  }

  private failed(error: Error): void {
    this.trouble = connectionTrouble(error, this.broker);
    if (this.client.connected) this.client.stream.destroy(); // after bytes that are no MQTT nothing that follows can be trusted
  }

  private cut(sentence: string): void {
    this.trouble = sentence;
    this.client.stream.destroy();
  }

  private lost(): void {
    this.acknowledger?.drop();
    if (this.stopping) return;
    const { options, client } = this;
    const lasted = performance.now() - this.openSince;
    if (lasted > options.retryTo) this.wait = options.retryFrom; // not before: one that opens and falls at once is not tried at full pace
    if (!Number.isNaN(lasted)) this.brief = this.trouble === null && lasted < BRIEF ? this.brief + 1 : 0;
    this.say(this.wasOpen ? 'lost' : 'connecting', `${this.trouble ?? this.lostWords()} Trying again.`);
    this.openSince = NaN;
    this.trouble = null;
    clearTimeout(this.retry);
    this.retry = setTimeout(() => this.connect(() => client.reconnect()), this.wait * (0.75 + Math.random() * 0.5));
    this.wait = Math.min(this.wait * 2, options.retryTo);
  }

  private lostWords(): string {
    const lost = `The connection to ${this.broker} is lost`;
    return this.brief < 2 ? `${lost}.` : `${lost} again and again: does another client use the identifier '${clean(this.options.clientId, 60)}'?`;
  }

  private take(packet: IPublishPacket, done: (error?: Error) => void): void {
    const { sink, acknowledger } = this;
    const { qos, messageId } = packet;
    if (sink) {
      try {
        this.deliver(packet, sink);
      } catch (error) {
        // A throw here would stop the client's pump for good while it still says that it is connected.
        sink.fault('unread', `${packet.topic}: ${String(error)}`);
      }
    }
    if (qos === 0 || messageId === undefined) done();
    else {
      done(LATER);
      if (sink) acknowledger?.add(messageId);
    }
  }

  private deliver({ topic, payload: raw, retain, dup, qos, messageId, properties }: IPublishPacket, sink: Sink): void {
    const ids = properties?.subscriptionIdentifier;
    if (ids !== undefined && ids !== this.subscription && !(Array.isArray(ids) && ids.includes(this.subscription))) return;
    const payload = typeof raw === 'string' ? Buffer.from(raw) : raw;
    if (qos > 0 && messageId !== undefined && this.redelivery?.seen(messageId, dup, topic, payload)) sink.fault('repeated', topic);
    else this.intake.take(topic, payload, { retain, dup }, sink);
  }

  /** Says what has changed, once. */
  private say(phase: SourcePhase, sentence: string): void {
    if (this.said === phase + sentence) return;
    this.said = phase + sentence;
    this.sink?.phase(phase, sentence);
  }

  private async end(): Promise<void> {
    clearTimeout(this.retry);
    const { client, acknowledger, sink } = this;
    await within(STOP_WITHIN, () => !client.connected || !acknowledger?.isPending);
    this.sink = null;
    acknowledger?.drop();
    // end() waits for ever while something is under way and nobody answers: it is given a moment, then the line is cut.
    if (client.connected) {
      let gone = false;
      client.end(() => (gone = true));
      await within(STOP_WITHIN, () => gone);
    }
    const stream = client.stream as MqttClient['stream'] | undefined;
    stream?.destroy();
    await within(STOP_WITHIN, () => stream?.closed !== false);
    if (sink) sink.phase('stopped', `No longer connected to ${this.broker}.`);
    this.finished();
  }
}

const LATER = new Error('acknowledged when it is durable');

async function within(most: number, holds: () => boolean): Promise<void> {
  for (const until = performance.now() + most; !holds() && performance.now() < until; )
    await new Promise((resolve) => setTimeout(resolve, 5));
}
