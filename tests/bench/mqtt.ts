import { fork } from 'node:child_process';
import { once } from 'node:events';
import { join } from 'node:path';
import mqtt from 'mqtt';
import { mqttSource } from '../../adapters/mqtt/source.js';
import type { Sink, Wanted } from '../../adapters/source.js';
import { Channel } from '../../src/engine/channel.js';
import { ZONE_RULES } from '../../src/engine/rules.js';
import { Broker } from '../real/broker.js';
import type { RawPublishing } from './rawPublisher.js';
import { atBroker } from '../adapters/mqttOptions.js';
import type { BenchRow } from './row.js';

const MESSAGES = 100_000;
const TOPICS = 10;
const ROUNDS = 7;
const REPORT = 2000; // messages after which the publisher is told how many were taken
const WARM = 10_000; // messages before the clock starts
const WITHIN = 60_000;

/** How the messages look. */
type Kind = Pick<RawPublishing, 'qos' | 'json'>;

/** A subscriber: connects, calls `taken` for each message, and gives the way to end it. */
type Contestant = (url: string, kind: Kind, taken: () => void) => Promise<() => Promise<unknown>>;

interface Run {
  readonly rate: number; // messages a second
  readonly cpu: number; // us of this process for each
}

/**
 * From a real broker through the source and the engine, against a bare mqtt.js subscriber with parseFloat or JSON.parse,
 * taking turns. One raw publisher feeds both as fast as they take.
 */
export async function bench(): Promise<BenchRow[]> {
  return [
    ...rows('MQTT QoS 0, number, broker to verdict', await alternate({ qos: 0, json: false }), 0.9),
    ...rows('MQTT QoS 0, JSON, broker to verdict', await alternate({ qos: 0, json: true }), 0.9),
    ...rows('MQTT QoS 1, number, broker to verdict', await alternate({ qos: 1, json: false }), 0.9),
  ];
}

async function alternate(kind: Kind): Promise<{ kilter: Run; bare: Run }> {
  const runs: Record<'kilter' | 'bare', Run[]> = { kilter: [], bare: [] };
  for (let round = 0; round < ROUNDS; round++) {
    runs.kilter.push(await run(kilter, kind));
    runs.bare.push(await run(bare, kind));
  }
  return { kilter: best(runs.kilter), bare: best(runs.bare) };
}

/** The fastest of the rounds: whatever else the machine does can only slow them. */
function best(runs: readonly Run[]): Run {
  return { rate: Math.max(...runs.map(({ rate }) => rate)), cpu: Math.min(...runs.map(({ cpu }) => cpu)) };
}

function rows(name: string, { kilter: ours, bare: theirs }: { kilter: Run; bare: Run }, least: number): BenchRow[] {
  const share = ours.rate / theirs.rate;
  return [
    { name, value: ours.rate, unit: 'messages/s' },
    { name: `${name}: bare mqtt.js`, value: theirs.rate, unit: 'messages/s' },
    { name: `${name}: share of the bare rate`, value: share, unit: 'x', goal: `at least ${least}`, met: share >= least },
    { name: `${name}: processor time`, value: ours.cpu, unit: 'us/message' },
    { name: `${name}: processor time, bare`, value: theirs.cpu, unit: 'us/message' },
  ];
}

/** One contestant with a broker and a publisher of its own. */
async function run(contestant: Contestant, kind: Kind): Promise<Run> {
  const broker = await Broker.start({ lines: ['max_inflight_messages 1000', 'autosave_on_changes false', 'autosave_interval 3600'] });
  let count = 0;
  let start = 0;
  let before = process.cpuUsage();
  let done!: (run: Run) => void;
  const finished = new Promise<Run>((resolve) => (done = resolve));
  const told: { send: (count: number) => void } = { send: () => undefined };
  const taken = (): void => {
    count++;
    if (count === WARM) {
      start = performance.now();
      before = process.cpuUsage();
    }
    if (count % REPORT === 0) told.send(count);
    if (count !== MESSAGES) return;
    const { user, system } = process.cpuUsage(before);
    done({ rate: ((MESSAGES - WARM) / (performance.now() - start)) * 1000, cpu: (user + system) / (MESSAGES - WARM) });
  };
  const end = await contestant(broker.url, kind, taken);
  const publishing: RawPublishing = { ...kind, port: broker.port, topics: TOPICS, messages: MESSAGES };
  const publisher = fork(join(import.meta.dirname, 'rawPublisher.js'), [JSON.stringify(publishing)]);
  told.send = (n) => publisher.send(n);
  let late: NodeJS.Timeout | undefined;
  try {
    return await Promise.race([
      finished,
      new Promise<never>((_, reject) => (late = setTimeout(() => reject(new Error(`Only ${count} of ${MESSAGES} messages came.`)), WITHIN))),
    ]);
  } finally {
    clearTimeout(late);
    const gone = once(publisher, 'exit');
    publisher.kill('SIGKILL');
    await gone;
    await end();
    await broker.dispose();
  }
}

const kilter: Contestant = async (url, { qos, json }, taken) => {
  const options = atBroker(url, { clientId: 'bench', keepalive: 60_000, qos, retryFrom: 100, retryTo: 1000 });
  const each = Array.from({ length: TOPICS }, (_, slot) => slot);
  const wanted = each.map((slot): Wanted => ({
    slot,
    channel: `flow${slot}`,
    field: null,
    topic: `bench/${slot}`,
    value: json ? '/value' : null,
    time: null,
    sequence: null,
    every: null,
  }));
  const channels = each.map((slot) => channelOf(`flow${slot}`));
  const source = mqttSource('bench', options, wanted);
  await new Promise<void>((open) => source.start(engineSink(channels, taken, open)));
  return () => source.stop();
};

/** Into the engine; a fault or an alarm would mean that something else is measured than a quiet reading. */
function engineSink(channels: readonly Channel[], taken: () => void, open: () => void): Sink {
  const unwanted = (what: string): never => {
    throw new Error(`The bench's messages are all quiet readings, and yet: ${what}`);
  };
  return {
    reading(slot, time, value) {
      if (channels[slot]!.take(time, value).length > 0) unwanted('an event');
      taken();
    },
    stale: () => unwanted('a retained message'),
    fault: (fault, sample) => unwanted(`${fault} ${sample}`),
    phase: (phase) => {
      if (phase === 'open') open();
    },
    durable: () => Promise.resolve(),
    pressure: () => null,
    now: () => Date.now(),
  };
}

const channelOf = (channel: string): Channel =>
  new Channel({
    channel,
    unit: 'L/min',
    every: null,
    silentAfter: null,
    range: [0, 60],
    tolerance: [30, 50],
    resolution: 0.001,
    band: { centre: 41.2, sigma: 0.31 },
    rules: ZONE_RULES,
    k: 20, // quiet throughout
    sideRun: 60,
    frozen: false, // the publisher's block comes round again, so that a topic may repeat a value
    frozenOdds: 1e-9,
    window: 500,
    clearAfter: 10,
  });

const bare: Contestant = async (url, { qos, json }, taken) => {
  const client = await mqtt.connectAsync(url, { clientId: 'bench', clean: false });
  let sum = 0;
  client.on('message', (_topic, payload) => {
    sum += json ? (JSON.parse(payload.toString()) as { value: number }).value : parseFloat(payload.toString());
    taken();
  });
  await client.subscribeAsync('bench/+', { qos });
  return async () => {
    await client.endAsync(true);
    if (!Number.isFinite(sum)) throw new Error('The bare subscriber read no numbers.');
  };
};
