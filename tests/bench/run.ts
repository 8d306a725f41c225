import { argv, stdout } from 'node:process';
import type { BenchRow } from './row.js';

/** Each bench stands in a file of its own and prints ratios to a bare rival measured in the same run. */
const BENCHES: Readonly<Record<string, () => Promise<{ bench(): BenchRow[] | Promise<BenchRow[]> }>>> = {
  engine: () => import('./engine.js'),
  serial: () => import('./serial.js'),
  mqtt: () => import('./mqtt.js'),
  replay: () => import('./replay.js'),
  log: () => import('./log.js'),
  screen: () => import('./screen.js'),
  start: () => import('./start.js'),
};

const asked = argv.slice(2);
for (const [name, load] of Object.entries(BENCHES)) {
  if (asked.length > 0 && !asked.includes(name)) continue;
  stdout.write(`\n${name}\n`);
  const { bench } = await load();
  for (const { name: what, value, unit, goal, met } of await bench()) {
    const number = Math.abs(value) >= 1000 ? value.toFixed(0) : value.toPrecision(3);
    const verdict = goal === undefined ? '' : `   goal: ${goal}${met === undefined ? '' : met ? ', met' : ', NOT met'}`;
    stdout.write(`  ${what.padEnd(64)} ${number.padStart(10)} ${unit}${verdict}\n`);
  }
}
