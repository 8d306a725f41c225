// Appends alarms to a log until it is killed, and prints each one's index once it is durable.
// node appendAlarms.mjs LOG FIRST [COUNT] [MAXBYTES]; KILTER_DIST: the folder of the built program.
import { writeSync } from 'node:fs';
import { pathToFileURL } from 'node:url';
import { resolve } from 'node:path';

const dist = process.env.KILTER_DIST ?? resolve(import.meta.dirname, '../../../dist');
const { AlarmLog } = await import(pathToFileURL(resolve(dist, 'src/record/alarmLog.js')).href);

const [file, first, count = Infinity, maxBytes = 20_000] = process.argv.slice(2);
const end = Number(first) + Number(count);
const say = (words) => writeSync(2, (words ?? 'all is well') + '\n');
const log = AlarmLog.open(file, { maxBytes: Number(maxBytes), onTrouble: say, onNote: say, retryAfter: 20 });
process.on('SIGHUP', () => log.rotate());

let index = Number(first);
while (index < end) {
  for (let burst = 1 + Math.floor(Math.random() * 20); burst > 0 && index < end; burst--) {
    const own = index++;
    log.append({ event: 'raised', index: own, sentence: 'x'.repeat(Math.random() * 600) }, () => writeSync(1, own + '\n'));
  }
  await (Math.random() < 0.5 ? log.durable() : new Promise((next) => setTimeout(next, Math.random() * 4)));
}
await log.close();
