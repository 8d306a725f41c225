import { existsSync, mkdirSync, readFileSync, readdirSync, statSync, symlinkSync, writeFileSync } from 'node:fs';
import { join } from 'node:path';
import { describe, expect, it } from 'vitest';
import { UserError } from '../../src/text/errors.js';
import { folder, ignore, opened, records } from './folder.js';

describe('where the log lies', () => {
  it('folders that are missing are made 0750, the file 0640, whatever the umask', async () => {
    const root = folder();
    const file = join(root, 'a', 'b', 'alarms.log');
    await opened(file).log.close();
    expect([join(root, 'a'), join(root, 'a', 'b'), file, `${file}.ballast`].map((path) => (statSync(path).mode & 0o777).toString(8))).toEqual(['750', '750', '640', '640']);
  });

  it('a folder, a device, a circle of links, a file where a folder should be: a sentence each', () => {
    const root = folder();
    writeFileSync(join(root, 'file'), '');
    symlinkSync(join(root, 'one'), join(root, 'two'));
    symlinkSync(join(root, 'two'), join(root, 'one'));
    expect(() => opened(root)).toThrow(/is a folder\. Name a file in it/);
    expect(() => opened('/dev/null')).toThrow(/not a regular file/);
    expect(() => opened(join(root, 'one'))).toThrow(/in a circle/);
    expect(() => opened(join(root, 'file', 'alarms.log'))).toThrow(UserError);
  });

  it('a symbolic link is followed, also to a file that is not there yet; what belongs to the log stands beside the file', async () => {
    const root = folder();
    mkdirSync(join(root, 'data'));
    symlinkSync(join('data', 'real.log'), join(root, 'alarms.log'));
    const { log } = opened(join(root, 'alarms.log'));
    await log.durable();
    expect(existsSync(join(root, 'data', 'real.log.lock'))).toBe(true);
    log.rotate();
    log.append({ event: 'raised' }, ignore);
    await log.close();
    expect(readdirSync(root).sort()).toEqual(['alarms.log', 'data']);
    expect(readdirSync(join(root, 'data'))).toHaveLength(3); // file, rotated, ballast
    expect(records(join(root, 'alarms.log'))[1]).toMatchObject({ event: 'raised' });
  });
});

describe('one process to a log', () => {
  it('a second is refused with the number of the first, and let in when that has closed', async () => {
    const file = join(folder(), 'alarms.log');
    const first = opened(file);
    expect(() => opened(file)).toThrow(/is being written by this process.*Stop that one first/s);
    await first.log.close();
    await opened(file).log.close();
    expect(existsSync(`${file}.lock`)).toBe(false);
  });

  const own = JSON.parse(lockText()) as { pid: number; start: string; boot: string };
  it.each([
    ['a process that is gone', { ...own, pid: 2 ** 22 + 1 }],
    ['an earlier process of the same number', { ...own, start: '1' }],
    ['a process of before the last boot', { ...own, boot: 'another' }],
    ['nobody: an empty file', ''],
    ['nobody: nonsense', 'xyz'],
    ['nobody: a number that is none', { pid: -1 }],
  ])('the lock of %s is taken over', async (_, holder) => {
    const file = join(folder(), 'alarms.log');
    writeFileSync(`${file}.lock`, typeof holder === 'string' ? holder : JSON.stringify(holder));
    const { log } = opened(file);
    expect(JSON.parse(readFileSync(`${file}.lock`, 'utf8'))).toEqual(own);
    await log.close();
    expect(readdirSync(join(file, '..')).sort()).toEqual(['alarms.log', 'alarms.log.ballast']);
  });

  it('a living process with no start time on record keeps its lock', () => {
    const file = join(folder(), 'alarms.log');
    writeFileSync(`${file}.lock`, JSON.stringify({ pid: process.ppid }));
    expect(() => opened(file)).toThrow(`process ${process.ppid}`);
  });
});

function lockText(): string {
  const stat = readFileSync('/proc/self/stat', 'utf8');
  return JSON.stringify({
    pid: process.pid,
    start: stat.slice(stat.lastIndexOf(')') + 2).split(' ')[19],
    boot: readFileSync('/proc/sys/kernel/random/boot_id', 'utf8').trim(),
  });
}
