import { readdirSync } from 'node:fs';
import { argv, stdout } from 'node:process';
import type { BenchRow } from './row.js';

/** Each bench stands in a file of its own, exports `bench`, and prints ratios to a bare rival measured in the same run. */
const asked = argv.slice(2);
const benches = readdirSync(import.meta.dirname)
  .filter((file) => file.endsWith('.js'))
  .map((file) => file.slice(0, -3))
  .filter((name) => name !== 'run' && name !== 'row' && (asked.length === 0 || asked.includes(name)));

for (const name of benches) {
  const room = (await import(`./${name}.js`)) as { bench?: () => BenchRow[] | Promise<BenchRow[]> };
  if (!room.bench) continue;
  stdout.write(`\n${name}\n`);
  for (const { name: what, value, unit, goal, met } of await room.bench()) {
    const number = Math.abs(value) >= 1000 ? value.toFixed(0) : value.toPrecision(3);
    const verdict = goal === undefined ? '' : `   goal: ${goal}${met === undefined ? '' : met ? ', met' : ', NOT met'}`;
    stdout.write(`  ${what.padEnd(68)} ${number.padStart(10)} ${unit}${verdict}\n`);
  }
}
