import { createHash } from 'node:crypto';
import canonicalize from 'canonicalize';

/** What the first line of the first file carries as the hash of the line before it. */
export const ORIGIN = '0'.repeat(64);

/** Greatest length of a line in bytes, its LF not counted. */
export const LONGEST_LINE = 1 << 20;

const KEY = 'previous';
const LINK_BYTES = `,"${KEY}":"${ORIGIN}"`.length;

/** A record in canonical form with a gap where the hash of the line before it goes. */
export interface Sealed {
  readonly head: string;
  readonly tail: string;
  /** Length of the line in bytes, its LF included; at most one more than the line will have. */
  readonly bytes: number;
}

/** A line of the chain without its LF, and its own hash. */
export interface Link {
  readonly line: string;
  readonly hash: string;
}

/** SHA-256 of a line's bytes (without its LF) in hexadecimal. */
export function hashOf(line: string | Uint8Array): string {
  return createHash('sha256').update(line).digest('hex');
}

/**
 * Brings a record into canonical form (RFC 8785). What JSON or the canonical form cannot hold becomes what it can:
 * NaN and the infinities null, a lone surrogate U+FFFD.
 *
 * @param record its key `previous` is reserved for the chain and replaced
 * @throws TypeError where the record is no JSON at all (a cycle, a bigint); RangeError beyond LONGEST_LINE
 */
export function seal(record: object): Sealed {
  const before: [string, unknown][] = [];
  const after: [string, unknown][] = [];
  for (const [key, value] of Object.entries(record)) {
    if (key !== KEY) (key < KEY ? before : after).push([key, value]); // UTF-16 code units, as RFC 8785 sorts
  }
  const left = canonical(before);
  const right = canonical(after);
  const head = left === '{}' ? '{' : left.slice(0, -1) + ',';
  const tail = right === '{}' ? '}' : ',' + right.slice(1);
  const bytes = Buffer.byteLength(head) + Buffer.byteLength(tail) + LINK_BYTES + 1;
  if (bytes > LONGEST_LINE) throw new RangeError(`A record of ${bytes} bytes is longer than a line of the alarm log may be (${LONGEST_LINE}).`);
  return { head, tail, bytes };
}

/** The line of a record behind the line whose hash is `previous`. */
export function link(record: object, previous: string): Link {
  return join(seal(record), previous);
}

/** As `link`, for a record that has been sealed before. */
export function join({ head, tail }: Sealed, previous: string): Link {
  const line = `${head}"${KEY}":"${previous}"${tail}`;
  return { line, hash: hashOf(line) };
}

/**
 * The record on a line, if the line is a JSON object that carries a hash as `previous`.
 * @returns null where the line is no JSON object (as a torn one), undefined where it is one without such a hash
 */
export function parseLink(line: string): (Record<string, unknown> & { previous: string }) | null | undefined {
  let value: unknown;
  try {
    value = JSON.parse(line);
  } catch {
    return null;
  }
  if (typeof value !== 'object' || value === null || Array.isArray(value)) return null;
  const record = value as Record<string, unknown>;
  const previous = Object.hasOwn(record, KEY) ? record[KEY] : null;
  if (typeof previous !== 'string' || !/^[0-9a-f]{64}$/.test(previous)) return undefined;
  return record as Record<string, unknown> & { previous: string };
}

/** Whether a line's text is the canonical form of the value on it. */
export function isCanonical(line: string, value: unknown): boolean {
  try {
    return canonicalize(value) === line;
  } catch {
    return false;
  }
}

function canonical(entries: readonly [string, unknown][]): string {
  const object = Object.fromEntries(entries);
  try {
    return canonicalize(object)!;
  } catch {
    return canonicalize(wellFormed(JSON.parse(JSON.stringify(object))))!;
  }
}

function wellFormed(value: unknown): unknown {
  if (typeof value === 'string') return value.replace(/\p{Surrogate}/gu, '\ufffd');
  if (Array.isArray(value)) return value.map(wellFormed);
  if (typeof value !== 'object' || value === null) return value;
  return Object.fromEntries(Object.entries(value).map(([key, inner]) => [wellFormed(key), wellFormed(inner)]));
}
