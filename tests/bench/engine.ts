import { sampleStandardDeviation, mean } from 'simple-statistics';
import { Channel } from '../../src/engine/channel.js';
import { ZONE_RULES } from '../../src/engine/rules.js';
import type { ChannelSpec } from '../../src/engine/spec.js';
import type { BenchRow } from './row.js';

const WINDOW = 500;
const ROUNDS = 9;
const READINGS = 2_000_000;

const SPEC: ChannelSpec = {
  channel: 'flow',
  unit: 'L/min',
  every: 100,
  silentAfter: 2000,
  range: [0, 60],
  tolerance: [30, 50],
  resolution: 0.01,
  band: { centre: 41.2, sigma: 0.31 },
  rules: ZONE_RULES,
  k: 20, // quiet throughout: what is measured is the reading that is no alarm
  sideRun: 60,
  frozen: true,
  frozenOdds: 1e-9,
  window: WINDOW,
  clearAfter: 10,
};

/**
 * The whole engine at each reading (rules, health, evidence, and the window's mean and sd asked for) against recomputing
 * mean and sd over the window, and against the barest single pass there is.
 */
export function bench(): BenchRow[] {
  const x = noise(1 << 16);
  const ns: Record<'pipeline' | 'verdict' | 'welford' | 'recompute', number[]> = { pipeline: [], verdict: [], welford: [], recompute: [] };
  for (let round = 0; round < ROUNDS; round++) {
    ns.pipeline.push(pipeline(x, READINGS));
    ns.verdict.push(verdictOnly(x, READINGS));
    ns.welford.push(welford(x, READINGS));
    ns.recompute.push(recompute(x, READINGS / 200));
  }
  const p = median(ns.pipeline);
  const w = median(ns.welford);
  const r = median(ns.recompute);
  return [
    { name: 'full pipeline with mean and sd of 500, per reading', value: p, unit: 'ns' },
    { name: 'the same without asking for mean and sd', value: median(ns.verdict), unit: 'ns' },
    { name: 'bare single pass (Welford), per reading', value: w, unit: 'ns' },
    { name: 'simple-statistics mean and sd over the window, per reading', value: r, unit: 'ns' },
    { name: 'full pipeline: times as fast as simple-statistics', value: r / p, unit: 'x', goal: 'at least 60', met: r / p >= 60 },
    { name: 'full pipeline: times the bare single pass', value: p / w, unit: 'x', goal: 'at most 8', met: p / w <= 8 },
    allocation(x),
    { name: 'state of one channel, window 500', value: new Channel(SPEC).bytes, unit: 'bytes', goal: 'at most 8192', met: new Channel(SPEC).bytes <= 8192 },
    drift(),
  ];
}

// Each contestant has a loop of its own, so that none pays for the others' shapes. Each gives ns a reading.

function pipeline(x: Float64Array, n: number): number {
  const channel = new Channel(SPEC);
  for (let i = 0; i < WINDOW; i++) channel.take(0, x[i]!);
  let sum = 0;
  const start = process.hrtime.bigint();
  for (let i = 0; i < n; i++) {
    channel.take(i * 100, x[i & 0xffff]!);
    sum += channel.mean() + channel.sd();
  }
  return took(start, n, sum);
}

function verdictOnly(x: Float64Array, n: number): number {
  const channel = new Channel(SPEC);
  let events = 0;
  const start = process.hrtime.bigint();
  for (let i = 0; i < n; i++) events += channel.take(i * 100, x[i & 0xffff]!).length;
  return took(start, n, events);
}

function welford(x: Float64Array, n: number): number {
  let m = 0;
  let s = 0;
  const start = process.hrtime.bigint();
  for (let i = 0; i < n; i++) {
    const v = x[i & 0xffff]!;
    const d = v - m;
    m += d / (i + 1);
    s += d * (v - m);
  }
  return took(start, n, m + Math.sqrt(s / n));
}

function recompute(x: Float64Array, n: number): number {
  const held = Array.from(x.subarray(0, WINDOW));
  let sum = 0;
  const start = process.hrtime.bigint();
  for (let i = 0; i < n; i++) {
    held[i % WINDOW] = x[i & 0xffff]!;
    sum += mean(held) + sampleStandardDeviation(held);
  }
  return took(start, n, sum);
}

/** @param result of the loop: a loop whose result nobody looks at may be left out by the compiler */
function took(start: bigint, n: number, result: number): number {
  const ns = Number(process.hrtime.bigint() - start) / n;
  if (!Number.isFinite(result)) throw new Error('The loop computed nothing.');
  return ns;
}

/** Bytes of heap that a quiet reading costs. */
function allocation(x: Float64Array): BenchRow {
  const channel = new Channel(SPEC);
  feed(channel, x, 2_000_000); // until the compiler has settled
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

const median = (values: number[]): number => values.sort((a, b) => a - b)[values.length >> 1]!;
