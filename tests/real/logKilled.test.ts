import { spawn, spawnSync, type ChildProcess } from 'node:child_process';
import { once } from 'node:events';
import { existsSync } from 'node:fs';
import { join } from 'node:path';
import { expect, it } from 'vitest';
import { rotatedFiles } from '../../src/record/logFiles.js';
import { readLog } from '../../src/record/readLog.js';
import { verifyChain } from '../../src/record/verifyChain.js';
import { folder, ignore, opened } from '../record/folder.js';

const PROGRAM = join(import.meta.dirname, 'programs', 'appendAlarms.mjs');
const KILLS = 50;

/** The program at work, and what it says is durable. */
function append(file: string, first: number): { child: ChildProcess; output: () => string } {
  let output = '';
  const child = spawn(process.execPath, [PROGRAM, file, String(first)], { stdio: ['ignore', 'pipe', 'inherit'] });
  child.stdout.setEncoding('utf8').on('data', (text: string) => (output += text));
  return { child, output: () => output };
}

function files(file: string): string[] {
  return [...rotatedFiles(file), ...(existsSync(file) ? [file] : [])];
}

async function logged(file: string): Promise<number[]> {
  const indices: number[] = [];
  const skipped: string[] = [];
  for await (const { record } of readLog(files(file), (sentence) => skipped.push(sentence))) {
    if (record['event'] === 'raised') indices.push(record['index'] as number);
  }
  expect(skipped).toEqual([]);
  return indices;
}

it(`killed ${KILLS} times at any moment: the log is whole after each, and nothing that was acknowledged is missing`, async () => {
  const file = join(folder(), 'alarms.log');
  const acknowledged = new Set<number>();
  let next = 0;
  for (let kill = 0; kill < KILLS; kill++) {
    const { child, output } = append(file, next);
    await once(child.stdout!, 'data');
    await new Promise((resolve) => setTimeout(resolve, Math.random() * 40));
    child.kill('SIGKILL');
    await once(child, 'close');
    expect(child.signalCode).toBe('SIGKILL');
    const said = output().split('\n').slice(0, -1).map(Number);
    expect(said.length).toBeGreaterThan(0);
    for (const index of said) acknowledged.add(index);

    const { log, troubles } = opened(file); // the killed one's lock is stale
    await log.durable();
    await log.close();
    expect(troubles).toEqual([]);
    expect(await verifyChain(files(file))).toMatchObject({ holds: true, continues: null });
    const found = await logged(file);
    expect(found).toEqual([...new Set(found)].sort((a, b) => a - b));
    const present = new Set(found);
    expect([...acknowledged].filter((index) => !present.has(index))).toEqual([]);
    next = Math.max(...found) + 1;
  }
  expect(acknowledged.size).toBeGreaterThan(KILLS);
});

it('a second process is refused while the first lives, and let in once that was killed', async () => {
  const file = join(folder(), 'alarms.log');
  const { child } = append(file, 0);
  await once(child.stdout!, 'data');
  expect(() => opened(file)).toThrow(`is being written by process ${child.pid}`);
  child.kill('SIGKILL');
  await once(child, 'close');
  const { log } = opened(file);
  log.append({ event: 'raised', index: -1 }, ignore);
  await log.close();
  expect(await verifyChain(files(file))).toMatchObject({ holds: true });
});

it('a limit on the size of files (RLIMIT_FSIZE): a new file is begun, every alarm arrives', async () => {
  const file = join(folder(), 'alarms.log');
  const { status, stdout, stderr } = spawnSync('bash', ['-c', `ulimit -f 64; exec "$0" "$1" "$2" 0 400 100000000`, process.execPath, PROGRAM, file], { encoding: 'utf8' });
  expect({ status, first: stderr.split('\n')[0] }).toMatchObject({ status: 0, first: expect.stringContaining('greatest size') as string });
  const expected = Array.from({ length: 400 }, (_, i) => i);
  expect(stdout.trim().split('\n').map(Number)).toEqual(expected);
  expect(await logged(file)).toEqual(expected);
  expect(files(file).length).toBeGreaterThan(1);
  expect(await verifyChain(files(file))).toMatchObject({ holds: true });
});
