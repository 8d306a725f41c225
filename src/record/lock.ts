import { linkSync, readFileSync, renameSync, rmSync, unlinkSync, writeFileSync } from 'node:fs';
import { clean } from '../text/clean.js';
import { UserError } from '../text/errors.js';

/** Who holds a log. Start time and boot tell a process from a later one with the same number. */
interface Holder {
  readonly pid: number;
  /** Start of the process in clock ticks since boot (proc(5), stat, field 22); null where the system does not tell. */
  readonly start: string | null;
  readonly boot: string | null;
}

/** A held lock; `release` gives it back. */
export interface Lock {
  release(): void;
}

/**
 * Takes the lock file beside a log, so that no two processes write one chain. A lock whose holder is gone is taken over.
 * It is advisory, and knows processes of this machine (this process namespace) only.
 *
 * @throws UserError where a living process holds it; the system's error where the file cannot be made
 */
export function takeLock(log: string): Lock {
  const path = `${log}.lock`;
  const own = `${path}.${process.pid}`;
  const text = JSON.stringify(holder(process.pid)) + '\n';
  try {
    writeFileSync(own, text, { mode: 0o640 });
    for (let tries = 0; tries < 10; tries++) {
      if (linkOnce(own, path)) return { release: () => release(path, text) };
      const found = read(path);
      if (found === null) continue; // given back just now
      const pid = livingHolder(found);
      if (pid !== null) {
        const who = pid === process.pid ? 'this process' : `process ${pid}`;
        throw new UserError(
          `The alarm log ${clean(log, 300)} is being written by ${who}.`,
          `Stop that one first, or name another log. (The lock is ${clean(path, 300)}.)`,
        );
      }
      setAside(path, own, found);
    }
    throw new UserError(`The lock ${clean(path, 300)} is fought over.`, 'See which processes write this log.');
  } finally {
    rmSync(own, { force: true });
  }
}

function linkOnce(from: string, to: string): boolean {
  try {
    linkSync(from, to); // appears whole or not at all
    return true;
  } catch (error) {
    if ((error as NodeJS.ErrnoException).code === 'EEXIST') return false;
    throw error;
  }
}

/** Removes a stale lock. Another process may have done so and locked anew between our look and our move: then it goes back. */
function setAside(path: string, own: string, stale: string): void {
  const aside = `${own}.stale`;
  try {
    renameSync(path, aside);
  } catch {
    return;
  }
  if (read(aside) !== stale) linkOnce(aside, path);
  unlinkSync(aside);
}

function release(path: string, text: string): void {
  if (read(path) === text) unlinkSync(path);
}

function read(path: string): string | null {
  try {
    return readFileSync(path, 'utf8');
  } catch {
    return null;
  }
}

/** @returns the process that holds the lock, or null where it is gone */
function livingHolder(text: string): number | null {
  let found: Partial<Holder> | null;
  try {
    found = JSON.parse(text) as Partial<Holder> | null;
  } catch {
    return null;
  }
  const pid = found?.pid;
  if (typeof pid !== 'number' || !Number.isSafeInteger(pid) || pid <= 0) return null;
  try {
    process.kill(pid, 0);
  } catch (error) {
    if ((error as NodeJS.ErrnoException).code === 'ESRCH') return null; // EPERM: alive, another user's
  }
  const now = holder(pid);
  const differs = (a: unknown, b: unknown) => typeof a === 'string' && typeof b === 'string' && a !== b;
  return differs(found?.boot, now.boot) || differs(found?.start, now.start) ? null : pid;
}

function holder(pid: number): Holder {
  const stat = read(`/proc/${pid}/stat`);
  const fields = stat?.slice(stat.lastIndexOf(')') + 2).split(' '); // the name before may hold blanks and brackets
  return { pid, start: fields?.[19] ?? null, boot: read('/proc/sys/kernel/random/boot_id')?.trim() ?? null };
}
