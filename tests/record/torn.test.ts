import { appendFileSync, readdirSync, readFileSync, statSync, writeFileSync } from 'node:fs';
import { join } from 'node:path';
import { describe, expect, it } from 'vitest';
import { verifyChain } from '../../src/record/verifyChain.js';
import { folder, ignore, opened, records } from './folder.js';

async function written(count: number): Promise<string> {
  const file = join(folder(), 'alarms.log');
  const { log } = opened(file);
  for (let i = 0; i < count; i++) log.append({ event: 'raised', index: i, sentence: 'flöw is silent' }, ignore);
  await log.close();
  return file;
}

function tornFiles(file: string): string[] {
  return readdirSync(join(file, '..')).filter((name) => name.includes('.torn-')).map((name) => join(file, '..', name));
}

async function reopen(file: string): Promise<string[]> {
  const { log, notes } = opened(file);
  await log.close();
  return notes;
}

describe('a torn end', () => {
  it('of every length is set aside, and every whole line kept', async () => {
    const source = await written(2);
    const whole = readFileSync(source);
    const lines = whole.toString().split('\n').slice(0, -1);
    const lastLength = Buffer.byteLength(lines.at(-1)!) + 1;
    const file = join(folder(), 'alarms.log');
    for (let cut = 1; cut <= lastLength; cut++) {
      writeFileSync(file, whole.subarray(0, whole.length - cut));
      const before = tornFiles(file).length;
      const notes = await reopen(file);
      const torn = lastLength - cut;
      const newest = tornFiles(file).sort().at(-1);
      expect(tornFiles(file).length - before).toBe(torn > 0 ? 1 : 0);
      expect(notes).toHaveLength(torn > 0 ? 1 : 0);
      if (torn > 0) {
        expect(readFileSync(newest!)).toEqual(whole.subarray(whole.length - lastLength, whole.length - cut));
        expect(statSync(newest!).mode & 0o777).toBe(0o640);
      }
      const after = readFileSync(file, 'utf8').split('\n');
      expect(after.slice(0, lines.length - 1)).toEqual(lines.slice(0, -1));
      expect(JSON.parse(after[lines.length - 1]!)).toMatchObject({ event: 'opened', ...(torn > 0 && { tornBytes: torn }) });
      expect(await verifyChain([file])).toMatchObject({ holds: true });
    }
  });

  it.each([
    ['NULs behind the last line, as some file systems leave', '\0'.repeat(5000)],
    ['NULs and an LF', '\0'.repeat(100) + '\n'],
    ['half a line and NULs', '{"event":"rai' + '\0'.repeat(400)],
    ['half a line with an LF', '{"event":"rai\n'],
    ['several lines of a batch, the first without its middle', '{"event":"rai\0\0\0\0\n{"eve\n\0\0\n{"x'],
    ['empty lines', '\n\n'],
    ['more than one look at the end', '\0'.repeat(300_000)],
  ])('%s', async (_, junk) => {
    const file = await written(3);
    const whole = readFileSync(file);
    appendFileSync(file, junk);
    const notes = await reopen(file);
    expect(notes).toEqual([expect.stringContaining(`torn line of ${Buffer.byteLength(junk)} bytes`)]);
    expect(readFileSync(tornFiles(file)[0]!, 'utf8')).toBe(junk);
    expect(readFileSync(file).subarray(0, whole.length)).toEqual(whole);
    expect(records(file).find(({ tornBytes }) => tornBytes !== undefined)).toMatchObject({ event: 'opened', tornBytes: Buffer.byteLength(junk) });
    expect(await verifyChain([file])).toMatchObject({ holds: true });
  });

  it('a log torn within its very first line begins anew', async () => {
    const file = join(folder(), 'alarms.log');
    writeFileSync(file, '{"event":"ope');
    expect(await reopen(file)).toHaveLength(1);
    expect(records(file)[0]).toMatchObject({ event: 'opened', tornBytes: 13, previous: '0'.repeat(64) });
  });

  it('a last line that is whole is never taken for torn, however long', async () => {
    const file = join(folder(), 'alarms.log');
    const { log } = opened(file);
    log.append({ event: 'raised', sentence: 'x'.repeat(1_000_000) }, ignore);
    await log.close();
    expect(await reopen(file)).toEqual([]);
    expect(await verifyChain([file])).toMatchObject({ holds: true, lines: 5 });
  });
});

describe('what is no alarm log stays untouched', () => {
  it.each([
    ['prose', 'Dear reader,\nthis is a letter.\n'],
    ['a recording', '{"time":1,"flow":41.2}\n{"time":2,"flow":41.3}\n'],
    ['a recording without a last LF', '{"time":1,"flow":41.2}\n{"time":2,"fl'],
    ['a large file without any line', 'x'.repeat(5_000_000)],
  ])('%s', (_, text) => {
    const file = join(folder(), 'something');
    writeFileSync(file, text);
    expect(() => opened(file)).toThrow(/is not an alarm log.*Name another file/s);
    expect(readFileSync(file, 'utf8')).toBe(text);
    expect(readdirSync(join(file, '..'))).toEqual(['something']);
  });
});

it('a broken chain near the end is said, and not mended', async () => {
  const file = await written(4);
  const changed = readFileSync(file, 'utf8').replace('"index":2', '"index":7');
  writeFileSync(file, changed);
  expect(await reopen(file)).toEqual([expect.stringContaining('chain of')]);
  expect(readFileSync(file, 'utf8').startsWith(changed)).toBe(true);
  expect(await verifyChain([file])).toMatchObject({ holds: false, line: 5 });
});
