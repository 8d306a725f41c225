import { join } from 'node:path';
import { expect, it } from 'vitest';
import { rotatedFiles } from '../../src/record/logFiles.js';
import { readLog } from '../../src/record/readLog.js';
import { verifyChain } from '../../src/record/verifyChain.js';
import { folder, ignore, opened } from '../record/folder.js';

async function indices(files: readonly string[]): Promise<unknown[]> {
  const found: unknown[] = [];
  for await (const { record } of readLog(files, ignore)) if (record['event'] === 'raised') found.push(record['index']);
  return found;
}

function upTo(count: number): number[] {
  return Array.from({ length: count }, (_, i) => i);
}

it('20 000 alarms at once: all durable, in order, none lost', async () => {
  const file = join(folder(), 'alarms.log');
  const { log, troubles, notes } = opened(file);
  const durable: number[] = [];
  for (const index of upTo(20_000)) log.append({ event: 'raised', index, sentence: 'x'.repeat(400) }, () => durable.push(index));
  await log.durable();
  expect(durable).toEqual(upTo(20_000));
  await log.close();
  expect(await indices([file])).toEqual(upTo(20_000));
  expect(await verifyChain([file])).toMatchObject({ holds: true, lines: 20_002 });
  expect([troubles, notes]).toEqual([[], []]);
});

it('20 000 alarms and the end at once: close writes them all', async () => {
  const file = join(folder(), 'alarms.log');
  const { log, troubles } = opened(file);
  for (const index of upTo(20_000)) log.append({ event: 'raised', index, sentence: 'x'.repeat(400) }, ignore);
  await log.close();
  expect(troubles).toEqual([]);
  expect(await verifyChain([file])).toMatchObject({ holds: true, lines: 20_002 });
});

it('rotated again and again under load: all alarms, in order, in one chain', async () => {
  const file = join(folder(), 'alarms.log');
  const { log, troubles, notes } = opened(file, { maxBytes: 100_000 });
  const durable: number[] = [];
  for (let index = 0; index < 5000; ) {
    for (let i = 0; i < 50; i++, index++) {
      const own = index;
      log.append({ event: 'raised', index, sentence: 'x'.repeat(100) }, () => durable.push(own));
    }
    if (index % 150 === 0) log.rotate();
    await new Promise((resolve) => setTimeout(resolve, 1));
  }
  await log.close();
  const files = [...rotatedFiles(file), file];
  expect(files.length).toBeGreaterThan(10);
  expect(durable).toEqual(upTo(5000));
  expect(await indices(files)).toEqual(upTo(5000));
  expect(await verifyChain(files)).toMatchObject({ holds: true, continues: null });
  expect([troubles, notes]).toEqual([[], []]);
});
