// Feeds quiet readings to a channel and prints the bytes of heap that each of them took: the least of several rounds.
// node quietReadings.mjs RULE...; KILTER_DIST: the folder of the built program.
import { memoryUsage } from 'node:process';
import { pathToFileURL } from 'node:url';
import { resolve } from 'node:path';

const dist = process.env.KILTER_DIST ?? resolve(import.meta.dirname, '../../../dist');
const { Channel } = await import(pathToFileURL(resolve(dist, 'src/engine/channel.js')).href);

const channel = new Channel({
  channel: 'flow',
  unit: 'L/min',
  every: 100,
  silentAfter: 2000,
  range: [0, 60],
  tolerance: [20, 55],
  resolution: 0.01,
  band: { centre: 40, sigma: 0.5 },
  rules: process.argv.slice(2),
  k: 30,
  sideRun: 60,
  frozen: true,
  frozenOdds: 1e-9,
  window: 500,
  clearAfter: 10,
});
const N = 200_000; // a number in a box takes 12 bytes or more: so many would show, and are too few for a collection
const readings = Float64Array.from({ length: 4096 }, (_, i) => 40 + (((i * 1597) % 4096) - 2048) / 1024);

function feed(n) {
  let events = 0;
  let sum = 0;
  for (let i = 0; i < n; i++) {
    events += channel.take(i * 100, readings[i & 4095]).length;
    sum += channel.mean() + channel.sd();
  }
  return events + (sum > 0 ? 0 : 1);
}

for (let i = 0; i < 20; i++) feed(N / 4); // until the compiler has settled
const taken = Array.from({ length: 7 }, () => {
  const before = memoryUsage().heapUsed;
  if (feed(N) > 0) throw new Error('The readings were not quiet.');
  return (memoryUsage().heapUsed - before) / N;
});
console.log(Math.min(...taken.map(Math.abs)));
