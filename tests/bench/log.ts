import { closeSync, fdatasync, mkdtempSync, openSync, rmSync, write } from 'node:fs';
import { join } from 'node:path';
import { promisify } from 'node:util';
import { AlarmLog } from '../../src/record/alarmLog.js';
import { link, ORIGIN } from '../../src/record/chain.js';
import { verifyChain } from '../../src/record/verifyChain.js';
import type { BenchRow } from './row.js';

const ROUNDS = 1500;
const BURST = 20_000;
const writing = promisify(write);
const syncing = promisify(fdatasync);

/** An alarm as the engine raises one: about 1.6 kB with twenty readings of evidence. */
function alarm(index: number): object {
  const readings = Array.from({ length: 20 }, (_, i) => ({ index: index + i, time: '2026-03-04T05:06:07.089Z', value: 41.2 + i / 7 }));
  return {
    event: 'raised',
    alarm: `flow-cusum-${index}`,
    channel: 'flow',
    index,
    time: '2026-03-04T05:06:07.089Z',
    detector: 'cusum',
    side: 'high',
    value: 42.13,
    z: 2.9,
    odds: 1e-6,
    evidence: { band: { centre: 41.2, sigma: 0.31 }, limits: { h: 12.658, k: 0.5 }, readings },
    sentence: 'flow has shifted up by about 2.9 sigma since reading 1214.',
  };
}

function quantile(sorted: readonly number[], p: number): number {
  return sorted[Math.min(sorted.length - 1, Math.floor(p * sorted.length))]!;
}

/** Time from an alarm to its being on the disk, beside a bare write and fdatasync of the same bytes, in turn on the same disk. */
export async function bench(): Promise<BenchRow[]> {
  const folder = mkdtempSync(join(process.cwd(), '.bench-log-')); // on a disk: the folder for temporary files may be memory
  try {
    const log = AlarmLog.open(join(folder, 'alarms.log'), { maxBytes: 1 << 30, onTrouble: () => undefined, onNote: () => undefined });
    await log.durable();
    const fd = openSync(join(folder, 'bare'), 'a');
    const line = Buffer.from(link(alarm(0), ORIGIN).line + '\n');
    const bare: number[] = [];
    const own: number[] = [];
    for (let i = 0; i < ROUNDS; i++) {
      const record = alarm(i);
      const start = performance.now();
      await writing(fd, line, 0, line.length, null);
      await syncing(fd);
      const between = performance.now();
      await new Promise<void>((resolve) => log.append(record, resolve));
      own.push(performance.now() - between);
      bare.push(between - start);
    }
    closeSync(fd);
    const sumBare = bare.reduce((a, b) => a + b) / 1000;
    for (const list of [bare, own]) list.sort((a, b) => a - b);

    const burst = Array.from({ length: BURST }, (_, i) => alarm(i));
    const start = performance.now();
    for (const record of burst) log.append(record, () => undefined);
    await log.durable();
    const seconds = (performance.now() - start) / 1000;
    await log.close();

    const begun = performance.now();
    const chain = await verifyChain([join(folder, 'alarms.log')]);
    const checked = (performance.now() - begun) / 1000;
    if (!chain.holds) throw new Error(chain.sentence);

    const ratio = quantile(own, 0.5) / quantile(bare, 0.5);
    const gain = BURST / seconds / (ROUNDS / sumBare);
    return [
      { name: 'write and fdatasync of a line, bare, p50', value: quantile(bare, 0.5), unit: 'ms' },
      { name: 'alarm to durable, p50', value: quantile(own, 0.5), unit: 'ms' },
      { name: 'alarm to durable, p50, times the bare one', value: ratio, unit: 'x', goal: 'at most 1.5', met: ratio <= 1.5 },
      { name: 'write and fdatasync of a line, bare, p99', value: quantile(bare, 0.99), unit: 'ms' },
      { name: 'alarm to durable, p99', value: quantile(own, 0.99), unit: 'ms' },
      { name: 'write and fdatasync of each line, bare', value: ROUNDS / sumBare, unit: 'lines/s' },
      { name: `${BURST} alarms at once until all are durable`, value: BURST / seconds, unit: 'alarms/s' },
      { name: 'the same, times the bare one', value: gain, unit: 'x', goal: 'at least 4', met: gain >= 4 },
      { name: `${line.length} bytes a line; chain checked`, value: chain.lines / checked, unit: 'lines/s' },
    ];
  } finally {
    rmSync(folder, { recursive: true, force: true });
  }
}
