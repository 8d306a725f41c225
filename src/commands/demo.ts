import { mkdtempSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { stdinSource } from '../../adapters/stdin/source.js';
import type { MqttOptions, StdinOptions } from '../../adapters/options.js';
import type { Source } from '../../adapters/source.js';
import { DEMO_CHANNELS, LINE_CHANNELS, type DemoChannel } from '../../adapters/simulated/demoChannels.js';
import { startDemoRig, type DemoRig } from '../../adapters/simulated/demoRig.js';
import { formatDuration } from '../engine/format.js';
import { openSource, wantedBySource } from '../stand/open.js';
import { standPrice } from '../stand/price.js';
import { parseDuration } from '../stand/quantities.js';
import type { ChannelConfig, Stand } from '../stand/types.js';
import { clean } from '../text/clean.js';
import { UserError } from '../text/errors.js';
import { parse, verb } from './cli.js';

const LINES: StdinOptions = { lines: 'csv', columns: LINE_CHANNELS, maxLine: 256 };

/** `kilter demo`: the whole tool with nothing attached. */
export async function run(args: readonly string[]): Promise<number> {
  const command = verb('demo', 'The whole tool with nothing attached: an embedded broker and a line of a logger carry a simulated coolant-pump cell whose sensors go wrong in turn.')
    .option('--headless', 'without the screen, as kilter guard')
    .option('--for <time>', "ends by itself, after such as '30s' or '5 min'")
    .option('--seed <n>', 'another run of the same cell', '1')
    .option('--log <file>', 'the alarm log; a fresh file in the folder for temporary files otherwise');
  const done = parse(command, args);
  if (done !== null) return done;
  const options = command.opts<{ headless?: boolean; for?: string; seed: string; log?: string }>();
  const seed = Number(options.seed);
  if (!Number.isSafeInteger(seed)) throw new UserError(`A seed of '${clean(options.seed, 40)}' cannot be.`, 'Give a whole number.');
  const until = options.for === undefined ? undefined : parseDuration(options.for);
  if (until === null) throw new UserError(`'${clean(options.for, 40)}' is no time.`, "Write such as '30s' or '5 min'.");
  if (!options.headless) (await import('../screen/shell.js')).checkTerminal(process.env, process.stdin, process.stdout);
  const rig = await startDemoRig({ seed });
  try {
    const stand = demoStand(options.log ?? join(mkdtempSync(join(tmpdir(), 'kilter-demo-')), 'alarms.jsonl'), rig.url);
    return await (options.headless ? headless(stand, rig, until) : onScreen(stand, rig, until));
  } finally {
    await rig.stop();
  }
}

async function headless(stand: Stand, rig: DemoRig, until: number | undefined): Promise<number> {
  const [{ guard, programListener }, { ProgramLog }, { standRun }] = await Promise.all([import('./guard.js'), import('./programLog.js'), import('./standRun.js')]);
  const program = new ProgramLog();
  return guard(await standRun(stand, programListener(program), 0, await sourcesOf(stand, rig)), program, until);
}

async function onScreen(stand: Stand, rig: DemoRig, until: number | undefined): Promise<number> {
  const { watch } = await import('./watch.js');
  const price = standPrice(stand);
  const quiet = `nothing is wrong now (a false alarm is due once in ${price === null ? 'an unknown time' : formatDuration(price)})`;
  return watch(stand, {
    sources: await sourcesOf(stand, rig),
    notice: () => `demo: ${rig.faultNow() ?? quiet}`,
    ...(until !== undefined && { until }),
  });
}

/** The stand of the demo: a stand like any other, only that it is made here and not read from a file. */
function demoStand(logFile: string, brokerUrl: string): Stand {
  return {
    file: 'demo',
    name: 'Coolant pump endurance cell',
    limits: 'textbook',
    budget: null,
    sources: [
      { name: 'bus', kind: 'mqtt', options: mqttOptions(brokerUrl) },
      { name: 'logger', kind: 'stdin', options: LINES },
    ],
    channels: DEMO_CHANNELS.map(channelConfig),
    log: { file: logFile, maxBytes: 10e6 },
  };
}

function channelConfig({ over, topic, value, field, learn, ...watched }: DemoChannel): ChannelConfig {
  return {
    origin: { source: over === 'mqtt' ? 'bus' : 'logger', field, topic, value, time: null, sequence: null },
    spec: { ...watched, band: { learn }, frozen: true, window: 500 },
  };
}

/** The stand's sources, save that its standard input is the rig's line. */
function sourcesOf({ sources, channels }: Stand, { lineStream }: DemoRig): Promise<Source[]> {
  const wanted = wantedBySource(channels);
  return Promise.all(
    sources.map(async (config) => {
      const own = wanted.get(config.name) ?? [];
      return config.kind === 'stdin' ? stdinSource(config.name, config.options, own, lineStream) : openSource(config, own);
    }),
  );
}

function mqttOptions(url: string): MqttOptions {
  return {
    url,
    protocol: '3.1.1',
    clientId: 'kilter-demo',
    keepalive: 15_000,
    qos: 1,
    ca: null,
    cert: null,
    key: null,
    user: null,
    password: null,
    maxPayload: 65_536,
    retryFrom: 250,
    retryTo: 5000,
  };
}
