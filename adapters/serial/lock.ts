import { readFile, stat } from 'node:fs/promises';
import { clean } from '../../src/text/clean.js';

/** A process that holds the lock of a port. */
export interface Holder {
  /** 0 for a process that this one may not see, as from within a container. */
  readonly pid: number;
  /** Its name, cleaned; null where it cannot be seen. */
  readonly name: string | null;
}

/**
 * Who holds the exclusive lock of a port by flock(2), as Linux lists it in /proc/locks; null where nobody does or it
 * cannot be seen. Asked before opening: serialport sets parity and error handling of the line first and asks for the
 * lock then, so that the mere attempt would disturb the program that has it.
 */
export async function lockHolder(path: string): Promise<Holder | null> {
  try {
    const [locks, { dev, ino }] = await Promise.all([readFile('/proc/locks', 'latin1'), stat(path)]);
    const file = `${hex(major(dev))}:${hex(minor(dev))}:${ino}`;
    for (const line of locks.split('\n')) {
      const [, kind, , mode, pid, held] = line.trim().split(/\s+/);
      if (kind !== 'FLOCK' || mode !== 'WRITE' || held !== file) continue;
      const name = await readFile(`/proc/${pid!}/comm`, 'utf8').catch(() => null);
      return { pid: Number(pid), name: name === null ? null : clean(name.trim(), 40) };
    }
  } catch {
    // no /proc, or no such port: opening it will tell
  }
  return null;
}

const hex = (number: number): string => number.toString(16).padStart(2, '0');

// The device numbers as Linux packs them into st_dev (makedev(3)).
const major = (dev: number): number => (dev >>> 8) & 0xfff;
const minor = (dev: number): number => (dev & 0xff) | ((dev >>> 12) & 0xfff00);
