import type { Fault } from '../../adapters/source.js';
import type { Channel } from '../engine/channel.js';
import type { AlarmRaised, EngineEvent } from '../engine/events.js';
import { formatDuration, groups } from '../engine/format.js';
import type { ChannelSpec } from '../engine/spec.js';
import { isoTime, toWire } from '../record/wire.js';
import { requireTextbook } from '../stand/budget.js';
import { loadStand } from '../stand/load.js';
import { replay, type Replayed } from '../stand/replay.js';
import { twoSided } from '../stats/normal.js';
import { clean } from '../text/clean.js';
import { UserError } from '../text/errors.js';
import { ANSWER_IS_NO, FINE, parse, say, verb } from './cli.js';
import { LineWriter } from './lineWriter.js';
import { Progress } from './progress.js';

const SHOWN = 20; // alarms in the text for people; --json gives all

interface Options {
  readonly stand: string;
  readonly json?: boolean;
  readonly readings?: boolean;
  readonly window?: string;
  readonly channel?: string[];
  readonly columns?: string[];
  readonly failOn?: string;
}

/** `kilter replay RECORDING --stand STAND`: a recording through the same engine, as fast as it goes. */
export async function run(args: readonly string[]): Promise<number> {
  const command = verb('replay', 'Sends a recording (CSV with header or JSON Lines, plain or gzip) through the engine, as fast as it goes.')
    .argument('<recording>', 'the file of readings; its columns bear the names of the channels')
    .requiredOption('--stand <file>', 'the stand file that says how the channels are watched')
    .option('--json', 'signals and alarm events as JSON Lines')
    .option('--readings', 'with --json: a line for each reading too, with the statistics of the rolling window')
    .option('--window <n>', 'readings in the rolling window')
    .option('--channel <name...>', 'only these channels')
    .option('--columns <name=channel...>', 'which column holds which channel, where their names differ')
    .option('--fail-on <what>', "'alarm': exit status 1 when an alarm was raised");
  const done = parse(command, args);
  if (done !== null) return done;
  const options = command.opts<Options>();
  if (options.failOn !== undefined && options.failOn !== 'alarm') throw new UserError(`--fail-on knows no '${clean(options.failOn, 40)}'.`, "Write '--fail-on alarm'.");
  const recording = command.args[0]!;
  const asked = channelsOf(options);
  const raised = await (options.json ? replayJson(recording, asked, options.readings ?? false) : replayText(recording, asked));
  return raised > 0 && options.failOn === 'alarm' ? ANSWER_IS_NO : FINE;
}

/** The channels to replay, and where in the recording they are looked for. */
interface Asked {
  readonly specs: readonly ChannelSpec[];
  readonly fields: readonly (string | null)[];
  /** Columns named on the command line, by channel. */
  readonly columns: ReadonlyMap<string, string>;
}

function channelsOf({ stand: file, channel: only, columns, window }: Options): Asked {
  const stand = loadStand(file);
  requireTextbook(stand);
  const known = stand.channels.map(({ spec }) => spec.channel);
  const named = columnsOf(columns ?? []);
  for (const name of [...(only ?? []), ...named.keys()])
    if (!known.includes(name)) throw new UserError(`The stand has no channel '${clean(name, 60)}'.`, `It has: ${clean(known.join(', '), 200)}.`);
  const size = window === undefined ? null : Number(window);
  if (size !== null && !(Number.isInteger(size) && size >= 2 && size <= 1e6)) throw new UserError(`A window of '${clean(window, 40)}' readings cannot be.`, 'Give a whole number from 2 to 1000000.');
  const chosen = stand.channels.filter(({ spec }) => !only || only.includes(spec.channel));
  return {
    specs: chosen.map(({ spec }) => (size === null ? spec : { ...spec, window: size })),
    fields: chosen.map(({ origin }) => origin.field),
    columns: named,
  };
}

/** `NAME=CHANNEL`, as often as it stands. @returns the column of each channel named */
function columnsOf(pairs: readonly string[]): Map<string, string> {
  const columns = new Map<string, string>();
  for (const pair of pairs) {
    const at = pair.lastIndexOf('='); // a channel's name holds none, a column's may
    if (at < 1 || at === pair.length - 1) throw new UserError(`--columns does not understand '${clean(pair, 60)}'.`, 'Write --columns NAME=CHANNEL.');
    columns.set(pair.slice(at + 1), pair.slice(0, at));
  }
  return columns;
}

/** What is to be known of a recording besides its readings, in sentences. */
function remarks({ specs, columns }: Asked, { absent, timed, torn }: Replayed, faults: FaultCount): string[] {
  const gone = absent.map((slot) => specs[slot]!.channel);
  for (const channel of gone)
    if (columns.has(channel)) throw new UserError(`The recording has no column '${clean(columns.get(channel), 60)}' for the channel ${clean(channel, 60)}.`);
  return [
    gone.length > 0 && `Not in the recording: ${clean(gone.join(', '), 300)}.`,
    !timed && 'The recording has no times: its readings are spaced by what the stand file says under every (else 1 s), from 1970 on.',
    faults.words,
    torn,
  ].filter((words) => typeof words === 'string');
}

class FaultCount {
  readonly counts = new Map<Fault, number>();

  add(fault: Fault): void {
    this.counts.set(fault, (this.counts.get(fault) ?? 0) + 1);
  }

  /** What the recording held that was no reading, in words; null where there was nothing. */
  get words(): string | null {
    const parts = [...this.counts].map(([fault, count]) => `${groups(count)} ${fault}`);
    return parts.length === 0 ? null : `Not read: ${parts.join(', ')}.`;
  }
}

/** @returns the number of alarms raised */
async function replayJson(recording: string, asked: Asked, readings: boolean): Promise<number> {
  const out = new LineWriter();
  const faults = new FaultCount();
  const progress = new Progress('replay');
  let raised = 0;
  const replayed = await replay(recording, asked.specs, asked.fields, {
    onEvents: (events) => {
      for (const event of events) {
        if (event.event === 'raised') raised++;
        out.line(JSON.stringify(toWire(event)));
      }
    },
    ...(readings && { onReading: (channel: Channel, time: number) => out.line(readingLine(channel, time)) }),
    onFault: (fault) => faults.add(fault),
    onProgress: (fraction) => progress.update(fraction),
    drained: () => out.drained(),
  }, asked.columns);
  progress.stop();
  out.flush();
  for (const words of remarks(asked, replayed, faults)) process.stderr.write(`kilter: ${words}\n`);
  return raised;
}

function readingLine(channel: Channel, time: number): string {
  const { z, value, index, spec } = channel;
  return JSON.stringify({
    event: 'reading',
    channel: spec.channel,
    index,
    time: isoTime(time),
    value, // JSON has no NaN and no infinity: they become null
    z,
    odds: z === null ? null : twoSided(z),
    window: channel.statistics(),
  });
}

async function replayText(recording: string, asked: Asked): Promise<number> {
  const faults = new FaultCount();
  const progress = new Progress('replay');
  const alarms: AlarmRaised[] = [];
  const signals = new Map<string, number>();
  const counts = new Map<string, number>();
  const began = performance.now();
  let first = 0;
  const take = (event: EngineEvent): void => {
    if (event.event === 'signal') {
      const key = `${event.channel}\n${event.detector}`;
      signals.set(key, (signals.get(key) ?? 0) + 1);
    } else if (event.event === 'raised') {
      counts.set(event.channel, (counts.get(event.channel) ?? 0) + 1);
      first++;
      if (alarms.length < SHOWN) alarms.push(event);
    }
  };
  const replayed = await replay(recording, asked.specs, asked.fields, {
    onEvents: (events) => events.forEach(take),
    onFault: (fault) => faults.add(fault),
    onProgress: (fraction) => progress.update(fraction),
    drained: () => null,
  }, asked.columns);
  progress.stop();
  describe(replayed, signals, counts, performance.now() - began);
  if (first > 0) {
    say();
    for (const { time, sentence } of alarms) say(`${isoTime(time) ?? time}  ${sentence}`);
    if (first > alarms.length) say(`and ${groups(first - alarms.length)} more alarms; --json gives them all.`);
  }
  for (const words of remarks(asked, replayed, faults)) say(words);
  return first;
}

function describe({ channels, readings }: Replayed, signals: ReadonlyMap<string, number>, counts: ReadonlyMap<string, number>, took: number): void {
  say(`${groups(readings)} readings in ${formatDuration(took)}.`);
  say();
  for (const { spec, index, band, settled } of channels) {
    const { channel, unit } = spec;
    const bandWords = band
      ? `band ${band.low.toPrecision(6)} to ${band.high.toPrecision(6)}${unit && ` ${unit}`} (${band.origin}${band.n === null ? '' : `, ${band.n} readings`})`
      : settled
        ? `settling, ${settled[0]} of ${settled[1]} readings`
        : 'no band';
    say(`${channel.padEnd(16)} ${groups(index + 1).padStart(12)} readings  ${groups(counts.get(channel) ?? 0).padStart(6)} alarms  ${bandWords}`);
    const own = [...signals].filter(([key]) => key.startsWith(`${channel}\n`));
    if (own.length > 0) say(`${''.padEnd(17)}signals: ${own.map(([key, n]) => `${key.split('\n')[1]} ${groups(n)}`).join(', ')}`);
  }
}
