import { readdirSync } from 'node:fs';
import { basename, dirname, join } from 'node:path';

const STAMP = /^\d{8}T\d{9}Z$/;

/** A time as it stands in file names: UTC, compact, with milliseconds; sorts by time. */
export function stamp(time: number): string {
  return new Date(time).toISOString().replace(/[-:.]/g, '');
}

function timeOf(stamped: string): number {
  const [, y, mo, d, h, mi, s, ms] = /^(\d{4})(\d\d)(\d\d)T(\d\d)(\d\d)(\d\d)(\d{3})Z$/.exec(stamped)!;
  return Date.UTC(Number(y), Number(mo) - 1, Number(d), Number(h), Number(mi), Number(s), Number(ms));
}

/** The files that a log has been rotated into by kilter, oldest first. */
export function rotatedFiles(log: string): string[] {
  const prefix = basename(log) + '.';
  let names: string[];
  try {
    names = readdirSync(dirname(log));
  } catch {
    return [];
  }
  return names
    .filter((name) => name.startsWith(prefix) && STAMP.test(name.slice(prefix.length)))
    .sort()
    .map((name) => join(dirname(log), name));
}

/** A name for the next file to be rotated: later than all there are, even when the clock went back. */
export function nextRotatedName(log: string, now: number): string {
  const newest = rotatedFiles(log).at(-1);
  const after = newest === undefined ? -Infinity : timeOf(newest.slice(log.length + 1)) + 1;
  return `${log}.${stamp(Math.max(now, after))}`;
}

/** The log that a rotated file came from, or null where the name is not that of a rotated file. */
export function logOfRotated(file: string): string | null {
  const dot = file.lastIndexOf('.');
  return dot > 0 && STAMP.test(file.slice(dot + 1)) ? file.slice(0, dot) : null;
}

/** Files that stand beside a log and are none: lock, ballast, torn ends set aside. */
export function isCompanion(file: string): boolean {
  return /\.(lock|ballast|torn-\d{8}T\d{9}Z)$/.test(file);
}
