import { sampleStandardDeviation, mean } from 'simple-statistics';
import { Channel } from '../../src/engine/channel.js';
import { ZONE_RULES } from '../../src/engine/rules.js';
import type { ChannelSpec } from '../../src/engine/spec.js';
import { FLOW } from './flow.js';
import type { BenchRow } from './row.js';

const WINDOW = 500;
const ROUNDS = 301;
const SLICE = 10_000; // readings: so short that whatever else runs on the machine disturbs some slices and not all
const RECOMPUTED = 100; // readings of a slice that is a hundred times as slow

const SPEC: ChannelSpec = {
  ...FLOW,
  k: 9, // quiet throughout: what is measured is the reading that is no alarm. 1 sigma of the zones is then 3
  sideRun: 60,
  window: WINDOW,
};
/** Every rule but those that noise of any kind sets off sooner or later. */
const EVERY_RULE: ChannelSpec = {
  ...SPEC,
  band: { centre: 41.2, sigma: 0.31, n: 500 },
  rules: [...ZONE_RULES, 'inconsistent', 'eight-outside-1'],
  resolution: null,
};

/**
 * The whole engine at each reading (rules, health, evidence, and the window's mean and sd asked for) against recomputing
 * mean and sd over the window, and against the barest single pass there is.
 */
export function bench(): BenchRow[] {
  const x = noise(1 << 16);
  const [p, w, r] = race([pipeline(x, SPEC), SLICE], [welford(x), SLICE], [recompute(x), RECOMPUTED]) as [number, number, number];
  const [v, e] = race([verdictOnly(x), SLICE], [pipeline(x, EVERY_RULE), SLICE]) as [number, number];
  const times = (name: string, value: number, goal: number, met: boolean): BenchRow => ({ name, value, unit: 'x', goal: `at ${name.startsWith('full pipeline: times as') ? 'least' : 'most'} ${goal}`, met });
  return [
    { name: 'full pipeline with mean and sd of 500, per reading', value: p, unit: 'ns' },
    { name: 'the same with two rules more and the resolution judged', value: e, unit: 'ns' },
    { name: 'full pipeline without asking for mean and sd', value: v, unit: 'ns' },
    { name: 'bare single pass (Welford), per reading', value: w, unit: 'ns' },
    { name: 'simple-statistics mean and sd over the window, per reading', value: r, unit: 'ns' },
    times('full pipeline: times as fast as simple-statistics', r / p, 60, r / p >= 60),
    times('full pipeline: times the bare single pass', p / w, 8, p / w <= 8),
    allocation(x),
    { name: 'state of one channel, window 500', value: new Channel(SPEC).bytes, unit: 'bytes', goal: 'at most 8192', met: new Channel(SPEC).bytes <= 8192 },
    drift(),
  ];
}

/** Runs slices of the contestants in turn. @returns median ns a reading of each */
function race(...contestants: readonly [slice: (round: number) => number, readings: number][]): number[] {
  const ns = contestants.map((): number[] => []);
  for (let round = 0; round < ROUNDS; round++)
    contestants.forEach(([slice, readings], i) => {
      const start = process.hrtime.bigint();
      const result = slice(round);
      const took = Number(process.hrtime.bigint() - start) / readings;
      if (!Number.isFinite(result)) throw new Error('The loop computed nothing.'); // and the compiler might have left it out
      if (round >= ROUNDS / 10) ns[i]!.push(took); // by then the compiler has settled
    });
  return ns.map(median);
}

function filled(spec: ChannelSpec, x: Float64Array): Channel {
  const channel = new Channel(spec);
  for (let i = 0; i < WINDOW; i++) channel.take(0, x[i]!);
  return channel;
}

// Each contestant has a loop of its own, so that none pays for the others' shapes.

function pipeline(x: Float64Array, spec: ChannelSpec): (round: number) => number {
  const channel = filled(spec, x);
  return (round) => {
    let sum = 0;
    for (let i = round * SLICE; i < (round + 1) * SLICE; i++) {
      channel.take(i * 100, x[i & 0xffff]!);
      sum += channel.mean() + channel.sd();
    }
    return sum;
  };
}

function verdictOnly(x: Float64Array): (round: number) => number {
  const channel = filled(SPEC, x);
  return (round) => {
    let events = 0;
    for (let i = round * SLICE; i < (round + 1) * SLICE; i++) events += channel.take(i * 100, x[i & 0xffff]!).length;
    return events;
  };
}

function welford(x: Float64Array): (round: number) => number {
  return (round) => {
    let m = 0;
    let s = 0;
    for (let i = 0; i < SLICE; i++) {
      const v = x[(round + i) & 0xffff]!;
      const d = v - m;
      m += d / (i + 1);
      s += d * (v - m);
    }
    return m + Math.sqrt(s / (SLICE - 1));
  };
}

function recompute(x: Float64Array): (round: number) => number {
  const held = Array.from(x.subarray(0, WINDOW));
  return (round) => {
    let sum = 0;
    for (let i = round * RECOMPUTED; i < (round + 1) * RECOMPUTED; i++) {
      held[i % WINDOW] = x[i & 0xffff]!;
      sum += mean(held) + sampleStandardDeviation(held);
    }
    return sum;
  };
}

/** Bytes of heap that a quiet reading costs. */
function allocation(x: Float64Array): BenchRow {
  const channel = new Channel(SPEC);
  for (let i = 0; i < 20; i++) feed(channel, x, 100_000); // until the compiler has settled
  (globalThis as { gc?: () => void }).gc?.();
  const n = 400_000; // so few that what they leave, if anything, is still there: no collection comes in between
  const before = process.memoryUsage().heapUsed;
  feed(channel, x, n);
  const bytes = (process.memoryUsage().heapUsed - before) / n;
  return { name: 'heap taken by a quiet reading', value: Math.max(0, bytes), unit: 'bytes', goal: 'none (below 0.1)', met: bytes < 0.1 };
}

function feed(channel: Channel, x: Float64Array, n: number): void {
  for (let i = 0; i < n; i++) channel.take(i * 100, x[i & 0xffff]!);
}

/** Relative error of the window's sd after 1e8 readings at offset 1e9 and sd 1e-3. */
function drift(): BenchRow {
  const channel = new Channel({ ...SPEC, range: null, tolerance: null, rules: [], frozen: false });
  const x = noise(1 << 16);
  const shifted = x.map((v) => 1e9 + (v - 41.2) / 310);
  const n = 100_000_000;
  for (let i = 0; i < n; i++) {
    channel.take(i, shifted[i & 0xffff]!);
  }
  const newest = Array.from({ length: WINDOW }, (_, i) => shifted[(n - WINDOW + i) & 0xffff]! - 1e9); // exact differences
  const error = Math.abs(channel.sd() / sampleStandardDeviation(newest) - 1);
  return { name: 'relative error of sd after 1e8 readings, offset 1e9, sd 1e-3', value: error, unit: '', goal: 'at most 1e-12', met: error <= 1e-12 };
}

/** Normal readings of the demo's flow, rounded to its resolution (Box and Muller 1958, on a fixed linear congruence). */
function noise(n: number): Float64Array {
  let state = 1;
  const uniform = (): number => ((state = (Math.imul(state, 1664525) + 1013904223) >>> 0) + 0.5) / 2 ** 32;
  return Float64Array.from({ length: n }, () => Math.round((41.2 + 0.31 * Math.sqrt(-2 * Math.log(uniform())) * Math.cos(2 * Math.PI * uniform())) * 100) / 100);
}

const median = (values: readonly number[]): number => [...values].sort((a, b) => a - b)[values.length >> 1]!;
