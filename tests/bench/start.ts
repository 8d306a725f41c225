import { spawnSync } from 'node:child_process';
import { fileURLToPath } from 'node:url';
import type { BenchRow } from './row.js';

const MAIN = fileURLToPath(new URL('../../src/main.js', import.meta.url));
const RUNS = 25;

/** Time from spawn to exit of fresh processes, alternating with bare node in the same run. */
export function bench(): Promise<BenchRow[]> {
  const bare = ['-e', '0'];
  const contestants: Record<string, string[]> = {
    '--help': [MAIN, '--help'],
    'odds beyond 3': [MAIN, 'odds', 'beyond', '3', '--json'],
    'check of the example stand': [MAIN, 'check', fileURLToPath(new URL('../../../config/cell.yaml', import.meta.url))],
  };
  const rows = Object.entries(contestants).map(([name, args]): BenchRow => {
    const with_: number[] = [];
    const without: number[] = [];
    for (let i = 0; i < RUNS; i++) {
      without.push(time(bare));
      with_.push(time(args));
    }
    const over = median(with_) - median(without);
    return name === '--help'
      ? { name: `start-up of kilter ${name}, over bare node`, value: over, unit: 'ms', goal: 'at most 60', met: over <= 60 }
      : { name: `start-up of kilter ${name}, over bare node`, value: over, unit: 'ms' };
  });
  return Promise.resolve(rows);
}

function time(args: string[]): number {
  const start = performance.now();
  const { status } = spawnSync(process.execPath, args, { stdio: 'ignore' });
  if (status !== 0) throw new Error(`node ${args.join(' ')} ended with status ${status}`);
  return performance.now() - start;
}

const median = (values: number[]): number => values.sort((a, b) => a - b)[values.length >> 1]!;
