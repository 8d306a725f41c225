import { spawn } from 'node:child_process';
import { existsSync, mkdtempSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { setTimeout as sleep } from 'node:timers/promises';
import { ReadlineParser, SerialPort } from 'serialport';
import { LineFeed } from '../../adapters/decoding/lineFeed.js';
import type { SerialOptions } from '../../adapters/options.js';
import { serialSource } from '../../adapters/serial/source.js';
import type { Sink, Wanted } from '../../adapters/source.js';
import type { BenchRow } from './row.js';

const LINES = 1_000_000;
const ROUNDS = 5;
const LAST = -1; // the value of the last line
const READ = 4095; // bytes that a Linux terminal hands over at most at once
const WITHIN = 120_000;

const wanted: Wanted[] = [
  { slot: 0, channel: 'flow', field: null, topic: null, value: null, time: null, sequence: null, every: null },
];

/** What one run took, for the lines that came. */
interface Run {
  readonly lines: number;
  readonly wall: number; // ms
  readonly cpu: number; // ms of this process
}

/** A sink that only counts, for what the transport and the decoding take alone. */
export function countingSink(): Sink {
  let sum = 0;
  return {
    reading: (_slot, _time, value) => void (sum += value),
    stale: () => undefined,
    phase: () => undefined,
    fault: (fault, sample) => {
      throw new Error(`No line of the bench is at fault: ${fault} ${sample}`);
    },
    durable: () => Promise.resolve(),
    pressure: () => null,
    now: () => Date.now(),
  };
}

/**
 * From a serial line to decoded readings in a sink, against serialport's own line parser with parseFloat: on a real
 * pseudo-terminal that is filled as fast as it goes, and from memory, where the terminal sets no bound.
 * @param sink made anew for each run; both contestants hand their readings to one
 */
export async function bench(sink: () => Sink = countingSink): Promise<BenchRow[]> {
  const contestants = { kilter: kilterOnPort, rival: rivalOnPort };
  const memory = { kilter: kilterFromMemory, rival: rivalFromMemory };
  const text = Buffer.from(
    Array.from({ length: LINES }, (_, i) => `${(12 + Math.sin(i * 1.7) / 2).toFixed(4)}\n`).join('') + `${LAST}\n`,
  );
  const folder = mkdtempSync(join(tmpdir(), 'kilter-bench-'));
  const file = join(folder, 'lines');
  writeFileSync(file, text);
  try {
    const port = await alternate(contestants, (run) => onPty(folder, file, (path) => run(path, sink())));
    const own = await alternate(memory, (run) => run(text, sink()));
    return [
      ...rows('serial pty to reading', port, { least: 1.5, of: 'wall' }),
      ...rows('serial bytes in memory to reading', own),
    ];
  } finally {
    rmSync(folder, { recursive: true });
  }
}

type Pair<T> = Record<'kilter' | 'rival', T>;

async function alternate<T>(contestants: Pair<T>, run: (contestant: T) => Promise<Run>): Promise<Pair<Run>> {
  const runs: Pair<Run[]> = { kilter: [], rival: [] };
  for (let round = 0; round < ROUNDS; round++)
    for (const name of ['kilter', 'rival'] as const) runs[name].push(await run(contestants[name]));
  return { kilter: middle(runs.kilter), rival: middle(runs.rival) };
}

/** The run of median rate. */
const middle = (runs: Run[]): Run => runs.sort((a, b) => a.wall / a.lines - b.wall / b.lines)[runs.length >> 1]!;

function rows(name: string, { kilter, rival }: Pair<Run>, goal?: { least: number; of: 'wall' | 'cpu' }): BenchRow[] {
  const rate = (run: Run): number => (run.lines / run.wall) * 1000;
  const cost = (run: Run): number => (run.cpu / run.lines) * 1000;
  const times = rate(kilter) / rate(rival);
  const ratio = { name: `${name}: rate, times the rival's`, value: times, unit: 'x' };
  return [
    { name, value: rate(kilter), unit: 'lines/s' },
    { name: `${name}: ReadlineParser and parseFloat`, value: rate(rival), unit: 'lines/s' },
    goal ? { ...ratio, goal: `at least ${goal.least}`, met: times >= goal.least } : ratio,
    { name: `${name}: processor time`, value: cost(kilter), unit: 'us/line' },
    { name: `${name}: processor time, rival`, value: cost(rival), unit: 'us/line' },
  ];
}

/** Runs a reader of a pseudo-terminal into which socat copies the lines as fast as they are taken. */
async function onPty(folder: string, file: string, read: (path: string) => Promise<Run>): Promise<Run> {
  const path = join(folder, 'line');
  // Without `ignoreeof` the terminal would hang up before its last bytes are read.
  const socat = spawn('socat', ['-u', '-b', '65536', `OPEN:${file},rdonly,ignoreeof`, `pty,raw,echo=0,wait-slave,link=${path}`], { stdio: 'ignore' });
  try {
    while (!existsSync(path)) await sleep(5);
    return await read(path);
  } finally {
    const gone = new Promise((resolve) => socat.once('exit', resolve));
    socat.kill('SIGKILL');
    await gone;
    rmSync(path, { force: true });
  }
}

/** Counts and clocks the readings on their way to a sink, from the first to the one of the last line. */
function clocked(sink: Sink, done: (run: Run) => void): Sink {
  let lines = 0;
  let start = 0;
  let before = process.cpuUsage();
  return {
    ...sink,
    reading(slot, time, value) {
      if (lines++ === 0) {
        start = performance.now();
        before = process.cpuUsage();
      }
      sink.reading(slot, time, value);
      if (value !== LAST) return;
      const { user, system } = process.cpuUsage(before);
      done({ lines, wall: performance.now() - start, cpu: (user + system) / 1000 });
    },
  };
}

async function within(run: Promise<Run>): Promise<Run> {
  const late = new AbortController();
  const result = await Promise.race([run, sleep(WITHIN, null, { signal: late.signal }).catch(() => null)]);
  late.abort();
  if (!result) throw new Error('The last line did not come.');
  return result;
}

async function kilterOnPort(path: string, sink: Sink): Promise<Run> {
  const options: SerialOptions = {
    path,
    baudRate: 115_200,
    dataBits: 8,
    parity: 'none',
    stopBits: 1,
    retryFrom: 100,
    retryTo: 1000,
    lines: 'number',
    columns: null,
    maxLine: 256,
  };
  const source = serialSource('bench', options, wanted);
  const run = await within(new Promise((resolve) => source.start(clocked(sink, resolve))));
  await source.stop();
  return run;
}

async function rivalOnPort(path: string, sink: Sink): Promise<Run> {
  const port = new SerialPort({ path, baudRate: 115_200 });
  const run = await within(
    new Promise((resolve) => {
      const into = clocked(sink, resolve);
      port.pipe(new ReadlineParser()).on('data', (line: string) => into.reading(0, into.now(), parseFloat(line)));
    }),
  );
  await new Promise<void>((resolve) => port.close(() => resolve()));
  return run;
}

function kilterFromMemory(text: Buffer, sink: Sink): Promise<Run> {
  return new Promise((resolve) => {
    const feed = new LineFeed({ lines: 'number', columns: null, maxLine: 256 }, wanted);
    feed.open(clocked(sink, resolve), false);
    for (let at = 0; at < text.length; at += READ) feed.push(text.subarray(at, at + READ));
  });
}

function rivalFromMemory(text: Buffer, sink: Sink): Promise<Run> {
  return new Promise((resolve) => {
    const into = clocked(sink, resolve);
    const parser = new ReadlineParser();
    parser.on('data', (line: string) => into.reading(0, into.now(), parseFloat(line)));
    void (async () => {
      for (let at = 0; at < text.length; at += READ)
        if (!parser.write(text.subarray(at, at + READ))) await new Promise((drained) => parser.once('drain', drained));
    })();
  });
}
