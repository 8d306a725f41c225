import { copyFileSync, readFileSync, readdirSync, renameSync, statSync, truncateSync, unlinkSync, writeFileSync } from 'node:fs';
import { basename, join } from 'node:path';
import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { logOfRotated, nextRotatedName, rotatedFiles, stamp } from '../../src/record/logFiles.js';
import { verifyChain } from '../../src/record/verifyChain.js';
import { folder, ignore, opened, records, until } from './folder.js';

function all(file: string): string[] {
  return [...rotatedFiles(file), file];
}

function indices(files: readonly string[]): unknown[] {
  return files.flatMap(records).filter(({ event }) => event === 'raised').map(({ index }) => index);
}

function upTo(count: number): number[] {
  return Array.from({ length: count }, (_, i) => i);
}

describe('rotation by size', () => {
  it('keeps order and chain over all files, and every file within the size', async () => {
    await fc.assert(
      fc.asyncProperty(fc.array(fc.nat(400), { maxLength: 40 }), fc.integer({ min: 600, max: 3000 }), fc.nat(4), async (lengths, maxBytes, pauses) => {
        const file = join(folder(), 'alarms.log');
        const { log, notes, troubles } = opened(file, { maxBytes });
        for (const [index, length] of lengths.entries()) {
          log.append({ event: 'raised', index, sentence: 'x'.repeat(length) }, ignore);
          if (pauses > 0 && index % pauses === 0) await log.durable();
        }
        await log.close();
        expect(indices(all(file))).toEqual(upTo(lengths.length));
        for (const each of all(file)) expect(statSync(each).size).toBeLessThanOrEqual(Math.max(maxBytes, 900)); // joining and one longest line
        expect(await verifyChain(all(file))).toMatchObject({ holds: true, continues: null });
        expect([notes, troubles]).toEqual([[], []]);
      }),
      { seed: 1, numRuns: 15 },
    );
  });

  it('a new file says which one it continues', async () => {
    const file = join(folder(), 'alarms.log');
    const { log } = opened(file, { maxBytes: 400 });
    for (let index = 0; index < 10; index++) log.append({ event: 'raised', index }, ignore);
    await log.close();
    const files = all(file);
    expect(files.length).toBeGreaterThan(3);
    for (let i = 1; i < files.length; i++) expect(records(files[i]!)[0]).toMatchObject({ event: 'continued', from: basename(files[i - 1]!) });
    expect(await verifyChain(files.slice(1))).toMatchObject({ holds: true, continues: basename(files[0]!) });
    expect(await verifyChain([...files.slice(0, 1), ...files.slice(2)])).toMatchObject({ holds: false, file: files[2], line: 1 });
  });

  it('a line longer than the size still gets through', async () => {
    const file = join(folder(), 'alarms.log');
    const { log } = opened(file, { maxBytes: 300 });
    for (let index = 0; index < 3; index++) log.append({ event: 'raised', index, sentence: 'x'.repeat(5000) }, ignore);
    await log.close();
    expect(indices(all(file))).toEqual([0, 1, 2]);
    expect(await verifyChain(all(file))).toMatchObject({ holds: true });
  });
});

describe('rotation on demand', () => {
  it('moves what there is to a name with the time in it; what comes goes into a new file', async () => {
    const file = join(folder(), 'alarms.log');
    const { log } = opened(file, { now: () => Date.UTC(2026, 2, 4, 5, 6, 7, 89) });
    log.append({ event: 'raised', index: 0 }, ignore);
    await log.durable();
    log.rotate();
    log.append({ event: 'raised', index: 1 }, ignore);
    await log.close();
    expect(rotatedFiles(file).map((each) => basename(each))).toEqual(['alarms.log.20260304T050607089Z']);
    expect(indices(rotatedFiles(file))).toEqual([0]);
    expect(indices([file])).toEqual([1]);
    expect(statSync(file).mode & 0o777).toBe(0o640);
  });

  it('never takes a name that is there, and names sort in order even when the clock goes back', async () => {
    const file = join(folder(), 'alarms.log');
    let time = Date.UTC(2026, 0, 1);
    const { log } = opened(file, { now: () => time });
    for (let index = 0; index < 12; index++) {
      log.append({ event: 'raised', index }, ignore);
      await log.durable();
      log.rotate();
      await until(() => rotatedFiles(file).length === index + 1);
      if (index === 6) time = 0;
    }
    await log.close();
    expect(indices(all(file))).toEqual(upTo(12));
    expect(await verifyChain(all(file))).toMatchObject({ holds: true });
    expect(nextRotatedName(file, 0) > rotatedFiles(file).at(-1)!).toBe(true);
  });

  it('names of rotated files lead back to their log, and others do not', () => {
    expect(logOfRotated(`/a/alarms.log.${stamp(0)}`)).toBe('/a/alarms.log');
    expect(logOfRotated('/a/alarms.log')).toBeNull();
    expect(logOfRotated('/a/alarms.log.1')).toBeNull();
  });
});

it('a rotation that fails is said and holds up no alarm', async () => {
  const file = join(folder(), `${'a'.repeat(236)}.log`); // the time behind it makes a name too long for any file system
  const { log, notes, troubles } = opened(file, { maxBytes: 500 });
  for (let index = 0; index < 20; index++) log.append({ event: 'raised', index }, ignore);
  await log.durable();
  log.rotate();
  await log.close();
  expect(indices([file])).toEqual(upTo(20));
  expect(await verifyChain([file])).toMatchObject({ holds: true });
  expect(notes[0]).toContain('cannot be rotated and goes on growing');
  expect(notes.length).toBeLessThanOrEqual(2);
  expect(troubles).toEqual([]);
});

describe('rotation from outside', () => {
  it.each([['and nothing put in its place', false], ['and an empty file put in its place', true]])('renamed %s', async (_, creates) => {
    const file = join(folder(), 'alarms.log');
    const { log, notes } = opened(file);
    log.append({ event: 'raised', index: 0 }, ignore);
    await log.durable();
    renameSync(file, `${file}.1`);
    if (creates) writeFileSync(file, '');
    log.append({ event: 'raised', index: 1 }, ignore); // before the signal: still into the old file
    await log.durable();
    log.rotate();
    log.append({ event: 'raised', index: 2 }, ignore);
    await log.close();
    expect(indices([`${file}.1`])).toEqual([0, 1]);
    expect(records(file)[0]).toMatchObject({ event: 'continued', from: 'alarms.log.1' });
    expect(rotatedFiles(file)).toEqual([]);
    expect(await verifyChain([`${file}.1`, file])).toMatchObject({ holds: true });
    expect(notes).toEqual([]);
  });

  it('removed: noticed at the next record, which goes into a new file, and said', async () => {
    const file = join(folder(), 'alarms.log');
    const { log, notes, troubles } = opened(file);
    log.append({ event: 'raised', index: 0 }, ignore);
    await log.durable();
    unlinkSync(file);
    log.append({ event: 'raised', index: 1 }, ignore);
    await log.close();
    expect(indices([file])).toEqual([1]);
    expect(notes).toEqual([expect.stringContaining('was removed')]);
    expect(troubles).toEqual([]);
    expect(await verifyChain([file])).toMatchObject({ holds: true, continues: 'alarms.log' });
  });

  it('copied and cut to nothing: the chain goes on from the copy, and it is said', async () => {
    const file = join(folder(), 'alarms.log');
    const { log, notes } = opened(file);
    log.append({ event: 'raised', index: 0 }, ignore);
    await log.durable();
    copyFileSync(file, `${file}.1`);
    truncateSync(file, 0);
    for (let index = 1; index < 4; index++) {
      log.append({ event: 'raised', index }, ignore);
      await log.durable();
    }
    await log.close();
    expect(readFileSync(file).includes(0)).toBe(false);
    expect(indices([`${file}.1`, file])).toEqual([0, 1, 2, 3]);
    expect(await verifyChain([`${file}.1`, file])).toMatchObject({ holds: true });
    expect(notes).toEqual([expect.stringContaining('was cut')]);
  });
});

describe('a start after a rotation', () => {
  it('goes on behind the file rotated last when the new one was never begun', async () => {
    const file = join(folder(), 'alarms.log');
    const first = opened(file);
    first.log.append({ event: 'raised', index: 0 }, ignore);
    await first.log.close();
    renameSync(file, nextRotatedName(file, Date.now())); // and then the power fails
    await opened(file).log.close();
    expect(records(file)[0]).toMatchObject({ event: 'opened', from: basename(rotatedFiles(file)[0]!) });
    expect(await verifyChain(all(file))).toMatchObject({ holds: true, files: 2 });
  });

  it('with a file that is already too large begins a new one', async () => {
    const file = join(folder(), 'alarms.log');
    const first = opened(file);
    first.log.append({ event: 'raised', index: 0, sentence: 'x'.repeat(2000) }, ignore);
    await first.log.close();
    await opened(file, { maxBytes: 1000 }).log.close();
    expect(records(file).map(({ event }) => event)).toEqual(['continued', 'opened', 'closed']);
    expect(await verifyChain(all(file))).toMatchObject({ holds: true, files: 2 });
    expect(readdirSync(join(file, '..')).sort()).toEqual([basename(file), `${basename(file)}.ballast`, ...rotatedFiles(file).map((each) => basename(each))].sort());
  });
});
