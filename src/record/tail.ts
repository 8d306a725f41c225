import { readSync } from 'node:fs';
import { hashOf, LONGEST_LINE, parseLink } from './chain.js';

/** How a log ends. */
export interface Tail {
  /** Bytes up to and with the LF of the last whole line. */
  readonly end: number;
  /** Hash of the last whole line; null where there is none. */
  readonly hash: string | null;
  /** Whether the lines that were read chain on each other. */
  readonly chained: boolean;
}

const FIRST_LOOK = 1 << 16;
const FARTHEST = 4 * LONGEST_LINE; // more than one batch of lines, which is all that a loss of power can tear
const LF = 10;

/**
 * Reads a log from its end, no farther than needed to find its last whole line.
 * @param size of the file in bytes
 * @returns null where this is no alarm log: lines of something else, or no line in reach of the end
 */
export function readTail(fd: number, size: number): Tail | null {
  for (let span = Math.min(size, FIRST_LOOK); ; span = Math.min(size, FARTHEST, span * 4)) {
    const bytes = Buffer.allocUnsafe(span);
    const start = size - span;
    let got = 0;
    while (got < span) {
      const n = readSync(fd, bytes, got, span - got, start + got);
      if (n === 0) break;
      got += n;
    }
    const found = lastLine(bytes.subarray(0, got), start === 0);
    if (found === null) return null;
    if (found) {
      const { from, to, text } = found;
      return { end: start + to + 1, hash: hashOf(text), chained: isChained(bytes, start === 0, from, to) };
    }
    if (start === 0) return got === 0 || bytes[0] === 0 || bytes[0] === 0x7b ? { end: 0, hash: null, chained: true } : null;
    if (span >= FARTHEST) return null;
  }
}

/** @returns the last whole line; undefined where none is in these bytes; null where a whole line is none of an alarm log */
function lastLine(bytes: Buffer, isWhole: boolean): { from: number; to: number; text: Buffer } | undefined | null {
  for (let stop = bytes.length; stop > 0; ) {
    const to = bytes.lastIndexOf(LF, stop - 1);
    if (to < 0) return undefined;
    const from = to === 0 ? 0 : bytes.lastIndexOf(LF, to - 1) + 1;
    if (from === 0 && !isWhole) return undefined;
    const text = bytes.subarray(from, to);
    const record = parseLink(text.toString());
    if (record) return { from, to, text };
    if (record === undefined) return null;
    stop = to;
  }
  return undefined;
}

function isChained(bytes: Buffer, isWhole: boolean, from: number, to: number): boolean {
  let next = parseLink(bytes.subarray(from, to).toString())!.previous;
  for (let stop = from - 1; stop > 0; ) {
    const start = bytes.lastIndexOf(LF, stop - 1) + 1;
    if (start === 0 && !isWhole) return true;
    const text = bytes.subarray(start, stop);
    if (hashOf(text) !== next) return false;
    const record = parseLink(text.toString());
    if (!record) return false;
    next = record.previous;
    stop = start - 1;
  }
  return true;
}
