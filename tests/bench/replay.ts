import { execFileSync } from 'node:child_process';
import { closeSync, mkdtempSync, openSync, rmSync, statSync, writeSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import type { ChannelSpec } from '../../src/engine/spec.js';
import { replay } from '../../src/stand/replay.js';
import { FLOW } from './flow.js';
import type { BenchRow } from './row.js';

const LINES = 10_000_000;
const ROUNDS = 3;
const RIVALS = ['mawk', 'gawk'];
/** Sums and squares: the least that awk can do for a mean and a standard deviation. */
const MEAN_AND_SD = 'BEGIN{FS=","} NR>1{n++;s+=$2;q+=$2*$2} END{m=s/n; printf "%d %.9g %.9g\\n", n, m, sqrt((q-n*m*m)/(n-1))}';

const SPEC: ChannelSpec = {
  ...FLOW,
  k: 5.2, // the zones stretched to about a false alarm in a million readings
  sideRun: 24,
};

/**
 * Ten million lines of CSV through the whole engine, with the four zone rules, frozen, silence, range and tolerance, against awk, which
 * computes the mean and standard deviation of the same column; and the heap that the replay leaves behind it.
 */
export async function bench(): Promise<BenchRow[]> {
  const folder = mkdtempSync(join(tmpdir(), 'kilter-bench-'));
  try {
    const file = join(folder, 'run.csv');
    write(file);
    const rivals = RIVALS.filter(present);
    if (rivals.length === 0) throw new Error('Neither mawk nor gawk is here to compare with.');
    const ours: number[] = [];
    const theirs = new Map<string, number[]>(rivals.map((rival) => [rival, []]));
    let events = 0;
    let peak = 0;
    for (let round = 0; round < ROUNDS; round++) {
      const run = await timed(file);
      ours.push(run.seconds);
      events = run.events;
      peak = Math.max(peak, run.peak);
      for (const rival of rivals) theirs.get(rival)!.push(awk(rival, file));
    }
    const kilter = median(ours);
    const size = statSync(file).size;
    return [
      { name: `kilter: ${LINES / 1e6} million lines through the whole engine`, value: kilter, unit: 's' },
      { name: 'kilter: lines', value: LINES / kilter / 1e6, unit: 'million/s' },
      { name: 'kilter: bytes', value: size / kilter / 1e6, unit: 'MB/s' },
      { name: 'events among them (signals, alarms raised and cleared)', value: events, unit: '' },
      { name: 'kilter: greatest heap seen during the replay', value: peak / 1e6, unit: 'MB', goal: 'below 64', met: peak < 64e6 },
      ...rivals.flatMap((rival): BenchRow[] => {
        const awks = median(theirs.get(rival)!);
        return [
          { name: `${rival}: mean and sd of the column`, value: awks, unit: 's' },
          { name: `kilter: times as fast as ${rival}`, value: awks / kilter, unit: 'x', goal: 'faster (above 1)', met: awks > kilter },
        ];
      }),
    ];
  } finally {
    rmSync(folder, { recursive: true, force: true });
  }
}

async function timed(file: string): Promise<{ seconds: number; events: number; peak: number }> {
  let events = 0;
  let peak = 0;
  const start = performance.now();
  const { readings } = await replay(file, [SPEC], [null], {
    onEvents: (some) => (events += some.length),
    onFault: (fault, sample) => {
      throw new Error(`The bench's own recording has a fault (${fault}): ${sample}`);
    },
    onProgress: () => (peak = Math.max(peak, process.memoryUsage().heapUsed)),
    drained: () => null,
  });
  if (readings !== LINES) throw new Error(`Of ${LINES} lines ${readings} were read.`);
  return { seconds: (performance.now() - start) / 1e3, events, peak };
}

/** @returns seconds */
function awk(rival: string, file: string): number {
  const start = performance.now();
  const said = execFileSync(rival, [MEAN_AND_SD, file], { encoding: 'utf8', env: { ...process.env, LC_ALL: 'C' } });
  if (Number(said.split(' ')[0]) !== LINES) throw new Error(`${rival} saw other lines: ${said}`);
  return (performance.now() - start) / 1e3;
}

function present(program: string): boolean {
  try {
    execFileSync('sh', ['-c', `command -v ${program}`]);
    return true;
  } catch {
    return false;
  }
}

/** A run of ten readings a second, normal about 41.2 with sigma 0.31, rounded to 0.01 (Box and Muller 1958, on a fixed linear congruence). */
function write(file: string): void {
  const to = openSync(file, 'w');
  let state = 1;
  const uniform = (): number => ((state = (Math.imul(state, 1664525) + 1013904223) >>> 0) + 0.5) / 2 ** 32;
  let text = 'time,flow\n';
  for (let i = 0; i < LINES; i++) {
    const value = 41.2 + 0.31 * Math.sqrt(-2 * Math.log(uniform())) * Math.cos(2 * Math.PI * uniform());
    text += `${1_767_225_600_000 + i * 100},${value.toFixed(2)}\n`;
    if (text.length >= 1 << 20) {
      writeSync(to, text);
      text = '';
    }
  }
  writeSync(to, text);
  closeSync(to);
}

const median = (values: number[]): number => values.sort((a, b) => a - b)[values.length >> 1]!;
