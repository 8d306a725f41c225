import { spawnSync } from 'node:child_process';
import { existsSync, mkdtempSync, rmSync, statSync, unlinkSync, writeFileSync, appendFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterAll, beforeAll, beforeEach, describe, expect, it } from 'vitest';
import { verifyChain } from '../../src/record/verifyChain.js';
import { opened, records, until } from '../record/folder.js';

const DISK = mkdtempSync(join(tmpdir(), 'kilter-small-'));
let isMounted = false;

/** A disk of 256 kB. Where this user may not mount one, the limit on file sizes (logKilled.test.ts) stands in; never for root, never in CI. */
beforeAll(() => {
  const { status, stderr } = spawnSync('mount', ['-t', 'tmpfs', '-o', 'size=256k', 'tmpfs', DISK], { encoding: 'utf8' });
  isMounted = status === 0;
  if (!isMounted && (process.getuid?.() === 0 || process.env['CI'] === 'true')) throw new Error(`A small disk could not be mounted, so that nothing is proven: ${stderr}`);
});

afterAll(() => {
  if (isMounted) spawnSync('umount', ['-l', DISK]);
  rmSync(DISK, { recursive: true, force: true });
});

let file: string;
let filler: string;
beforeEach(({ task }) => {
  file = join(DISK, `${task.id}.log`);
  filler = join(DISK, 'filler');
});

function fill(): void {
  for (const size of [65_536, 4096, 1]) {
    try {
      for (;;) appendFileSync(filler, Buffer.alloc(size, 1));
    } catch (error) {
      expect((error as NodeJS.ErrnoException).code).toBe('ENOSPC');
    }
  }
}

function alarms(): unknown[] {
  return records(file).filter(({ event }) => event === 'raised').map(({ index }) => index);
}

function upTo(count: number): number[] {
  return Array.from({ length: count }, (_, i) => i);
}

describe('a disk that is full', () => {
  it('the reserve lets alarms through, then they wait in memory; freed, all arrive in order, and the reserve stands again', async () => {
    if (!isMounted) return; // see above: neither root nor CI
    const { log, troubles } = opened(file);
    await log.durable();
    await until(() => existsSync(`${file}.ballast`) && statSync(`${file}.ballast`).size === 65_536);
    fill();
    const durable: number[] = [];
    let count = 0;
    const alarm = (length = 1000) => {
      const index = count++;
      log.append({ event: 'raised', index, sentence: 'x'.repeat(length) }, () => durable.push(index));
      return new Promise((resolve) => setTimeout(resolve, 1));
    };
    while (troubles.length === 0) await alarm();
    expect(troubles[0]).toMatch(/is full.*reserve beside it was released/);
    expect(existsSync(`${file}.ballast`)).toBe(false);
    await until(() => durable.length === count); // this one, too, and it is on the full disk
    while (troubles.length === 1) await alarm();
    expect(troubles[1]).toMatch(/is full.*wait in memory/);
    expect(durable.length).toBeGreaterThan(40);
    for (let i = 0; i < 150; i++) await alarm(50); // in all well below what the disk holds without the filler
    expect(durable.length).toBeLessThan(count);
    expect(alarms()).toEqual(upTo(durable.length));

    unlinkSync(filler);
    await log.durable();
    await until(() => troubles.length === 3);
    expect(troubles[2]).toBeNull();
    await until(() => existsSync(`${file}.ballast`));
    await log.close();
    expect(durable).toEqual(upTo(count));
    expect(alarms()).toEqual(upTo(count));
    expect(await verifyChain([file])).toMatchObject({ holds: true, lines: count + 2 });
    rmSync(file);
    rmSync(`${file}.ballast`);
  });

  it('at the start: said, and the log is begun when there is room', async () => {
    if (!isMounted) return; // see above: neither root nor CI
    writeFileSync(filler, '');
    fill();
    const { log, troubles } = opened(file);
    for (const index of upTo(5)) log.append({ event: 'raised', index, sentence: 'x'.repeat(2000) }, () => undefined);
    await until(() => troubles.length > 0);
    expect(troubles[0]).toContain('is full');
    unlinkSync(filler);
    await log.durable();
    await until(() => troubles.at(-1) === null);
    await log.close();
    expect(alarms()).toEqual(upTo(5));
    expect(await verifyChain([file])).toMatchObject({ holds: true, continues: null });
  });
});
