import { existsSync, mkdirSync, readFileSync, renameSync, rmSync, statSync } from 'node:fs';
import { dirname, join } from 'node:path';
import fc from 'fast-check';
import { describe, expect, it, vi } from 'vitest';
import { realDisk, type Disk } from '../../src/record/disk.js';
import { verifyChain } from '../../src/record/verifyChain.js';
import { failure, faultyDisk, type Fault } from './faultyDisk.js';
import { folder, ignore, opened, records, until } from './folder.js';

function alarms(file: string): unknown[] {
  return records(file).filter(({ event }) => event === 'raised').map(({ index }) => index);
}

/** A disk that fails with a code as long as it is set. */
function switchable(): { code: string | null; readonly disk: Disk } {
  const state = {
    code: null as string | null,
    disk: { ...realDisk, write: (fd: number, bytes: Uint8Array) => (state.code === null ? realDisk.write(fd, bytes) : Promise.reject(failure(state.code))) },
  };
  return state;
}

describe('whatever the disk does', () => {
  it('every record arrives once, in order, in a whole chain, and is called durable only when it can be read back', async () => {
    const faults = fc.array(fc.constantFrom<Fault>('none', 'short', 'full', 'short then full', 'sync', 'no way back', 'quota'), { maxLength: 30 });
    await fc.assert(
      fc.asyncProperty(faults, fc.array(fc.integer({ min: 1, max: 5 }), { minLength: 1, maxLength: 12 }), async (plan, groups) => {
        const file = join(folder(), 'alarms.log');
        const { log, troubles } = opened(file, { disk: faultyDisk(file, () => plan.shift() ?? 'none'), retryAfter: 1 });
        const durable: number[] = [];
        let index = 0;
        for (const group of groups) {
          for (let i = 0; i < group; i++) {
            const own = index++;
            log.append({ event: 'raised', index: own }, () => {
              expect(readFileSync(file, 'utf8')).toContain(`"index":${own},`);
              durable.push(own);
            });
          }
          await new Promise(setImmediate);
        }
        await log.durable();
        await log.close();
        const expected = Array.from({ length: index }, (_, i) => i);
        expect(durable).toEqual(expected);
        expect(alarms(file)).toEqual(expected);
        expect(await verifyChain([file])).toMatchObject({ holds: true, lines: index + 2 });
        expect(troubles.at(-1) ?? null).toBeNull();
      }),
      { seed: 1, numRuns: 60 },
    );
  });
});

describe('trouble', () => {
  it.each([
    ['ENOSPC', /is full\..*Free some space there/],
    ['EDQUOT', /quota.*raise the quota/],
    ['EIO', /reports a fault/],
    ['EROFS', /read-only.*remount/],
    ['EACCES', /Grant the right/],
  ])('%s is said once with what to do, and withdrawn', async (code, sentence) => {
    const file = join(folder(), 'alarms.log');
    const state = switchable();
    const { log, troubles } = opened(file, { disk: state.disk, ballastBytes: 0 });
    await log.durable();
    state.code = code;
    for (let index = 0; index < 5; index++) {
      log.append({ event: 'raised', index }, ignore);
      await new Promise((resolve) => setTimeout(resolve, 20));
    }
    expect(troubles).toEqual([expect.stringMatching(sentence)]);
    state.code = null;
    await log.durable();
    await until(() => troubles.length === 2);
    expect(troubles[1]).toBeNull();
    expect(alarms(file)).toEqual([0, 1, 2, 3, 4]);
  });

  it('a folder that vanished is made again, and the log in it', async () => {
    const file = join(folder(), 'rig', 'alarms.log');
    const { log, notes } = opened(file);
    log.append({ event: 'raised', index: 0 }, ignore);
    await log.durable();
    rmSync(dirname(file), { recursive: true });
    log.append({ event: 'raised', index: 1 }, ignore);
    await log.durable();
    expect(alarms(file)).toEqual([1]);
    expect(notes).toEqual([expect.stringContaining('was removed')]);
  });

  it('a folder in the place of the log: said, and over when the way is free', async () => {
    const file = join(folder(), 'alarms.log');
    const { log, troubles } = opened(file);
    await log.durable();
    renameSync(file, `${file}.old`);
    mkdirSync(file);
    log.rotate();
    log.append({ event: 'raised', index: 0 }, ignore);
    await until(() => troubles.length === 1);
    rmSync(file, { recursive: true });
    await log.durable();
    await until(() => troubles.length === 2);
    expect(troubles[1]).toBeNull();
    expect(alarms(file)).toEqual([0]);
    expect(await verifyChain([`${file}.old`, file])).toMatchObject({ holds: true });
  });

  it('a file that may not grow is left for a new one', async () => {
    const file = join(folder(), 'alarms.log');
    let limit = 2000;
    const disk: Disk = {
      ...realDisk,
      write: async (fd, bytes) => {
        const { size } = await realDisk.fstat(fd);
        if (size + bytes.length > limit) throw failure('EFBIG');
        return realDisk.write(fd, bytes);
      },
    };
    const { log, troubles } = opened(file, { disk });
    for (let index = 0; index < 30; index++) {
      log.append({ event: 'raised', index }, ignore);
      await new Promise(setImmediate);
    }
    await log.durable();
    limit = Infinity;
    await log.close();
    expect(statSync(file).size).toBeLessThanOrEqual(2500);
    expect(troubles[0]).toContain('greatest size');
    expect(troubles.at(-1)).toBeNull();
  });
});

describe('memory for waiting records', () => {
  it('is bounded: the oldest are kept, what is dropped is counted, said and logged', async () => {
    const file = join(folder(), 'alarms.log');
    const state = switchable();
    const { log, troubles } = opened(file, { disk: state.disk, ballastBytes: 0, maxBacklogBytes: 2000 });
    await log.durable();
    state.code = 'ENOSPC';
    const durable: number[] = [];
    for (let index = 0; index < 100; index++) log.append({ event: 'raised', index }, () => durable.push(index));
    await until(() => troubles.length > 0);
    expect(troubles.at(-1)).toContain('new ones are dropped and counted');
    let isDurable = false;
    const waiting = log.durable().then(() => (isDurable = true));
    await new Promise((resolve) => setTimeout(resolve, 50));
    expect(isDurable).toBe(false);
    state.code = null;
    await waiting;
    log.append({ event: 'raised', index: 100 }, () => durable.push(100));
    await log.close();
    const kept = durable.length - 1;
    expect(kept).toBeGreaterThan(5);
    expect(durable).toEqual([...Array.from({ length: kept }, (_, i) => i), 100]);
    expect(alarms(file)).toEqual(durable);
    const all = records(file);
    expect(all.filter(({ event }) => event === 'lost')).toMatchObject([{ count: 100 - kept, from: expect.any(String) as string, to: expect.any(String) as string }]);
    expect(all.findIndex(({ event }) => event === 'lost')).toBe(1 + kept);
    expect(troubles.at(-1)).toBeNull();
    expect(await verifyChain([file])).toMatchObject({ holds: true });
  });

  it('a fault in what a caller does with "durable" is loud, and stops nothing', async () => {
    const file = join(folder(), 'alarms.log');
    const { log } = opened(file);
    const thrown: unknown[] = [];
    const queued = vi.spyOn(globalThis, 'queueMicrotask').mockImplementation((task) => {
      try {
        task();
      } catch (error) {
        thrown.push(error);
      }
    });
    log.append({ event: 'raised', index: 0 }, () => {
      throw new Error('the caller');
    });
    log.append({ event: 'raised', index: 1 }, ignore);
    await log.durable();
    queued.mockRestore();
    expect(thrown).toEqual([new Error('the caller')]);
    expect(alarms(file)).toEqual([0, 1]);
  });
});

describe('close', () => {
  it('comes back in time when the disk takes nothing, and says how many were not written', async () => {
    const file = join(folder(), 'alarms.log');
    const state = switchable();
    const { log, troubles } = opened(file, { disk: state.disk, ballastBytes: 0, closeWithin: 150, retryAfter: 60_000 });
    await log.durable();
    state.code = 'ENOSPC';
    for (let index = 0; index < 7; index++) log.append({ event: 'raised', index }, ignore);
    await log.close();
    expect(troubles.at(-1)).toMatch(/^7 records could not be written.*: lost\. The disk that holds .* is full\.$/);
    expect(existsSync(`${file}.lock`)).toBe(false);
    expect(() => log.append({ event: 'raised' }, ignore)).toThrow('closed');
  });

  it('does not wait for a retry: what fits now is written now', async () => {
    const file = join(folder(), 'alarms.log');
    const state = switchable();
    const { log, troubles } = opened(file, { disk: state.disk, retryAfter: 60_000 });
    await log.durable();
    state.code = 'EIO';
    log.append({ event: 'raised', index: 0 }, ignore);
    await until(() => troubles.length === 1);
    state.code = null;
    await log.close();
    expect(alarms(file)).toEqual([0]);
    expect(records(file).at(-1)).toMatchObject({ event: 'closed' });
    expect(troubles).toEqual([expect.any(String), null]);
  });

  it('a disk that hangs for ever does not hold it up', async () => {
    const file = join(folder(), 'alarms.log');
    let hangs = false;
    const disk: Disk = { ...realDisk, fdatasync: (fd) => (hangs ? new Promise(() => undefined) : realDisk.fdatasync(fd)) };
    const { log, troubles } = opened(file, { disk, closeWithin: 100 });
    await log.durable();
    hangs = true;
    const durable: number[] = [];
    log.append({ event: 'raised', index: 0 }, () => durable.push(0));
    await until(() => alarms(file).length === 1); // written, and yet not called durable
    await log.close();
    expect(durable).toEqual([]);
    expect(troubles).toEqual([expect.stringContaining('One record could not be written')]);
  });
});
