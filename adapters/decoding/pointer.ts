import { UserError } from '../../src/text/errors.js';
import { clean } from '../../src/text/clean.js';

/** A compiled JSON Pointer: its reference tokens, unescaped. The empty list means the whole document. */
export type Pointer = readonly string[];

const INDEX = /^(?:0|[1-9][0-9]{0,9})$/; // RFC 6901 section 4: no leading zeros, no sign

/**
 * Compiles a JSON Pointer (RFC 6901): '' is the whole document, '/a/0' the first element of member a;
 * `~1` stands for `/` and `~0` for `~`.
 * @throws UserError where the text is no pointer
 */
export function parsePointer(text: string): Pointer {
  if (text === '') return [];
  if (!text.startsWith('/'))
    throw new UserError(`'${clean(text, 60)}' is no JSON pointer.`, 'A pointer begins with /, as in /celsius or /data/0.');
  if (/~(?![01])/.test(text))
    throw new UserError(`'${clean(text, 60)}' is no JSON pointer.`, 'Write ~0 for the character ~ and ~1 for /.');
  return text
    .slice(1)
    .split('/')
    .map((token) => token.replaceAll('~1', '/').replaceAll('~0', '~')); // in this order: RFC 6901 section 4
}

/**
 * What a pointer leads to in a parsed JSON document, or undefined where it leads nowhere. Sees own members alone:
 * neither prototypes (`/constructor`), nor an array's or a string's `length`.
 */
export function follow(document: unknown, pointer: Pointer): unknown {
  let at = document;
  for (const token of pointer) {
    if (typeof at !== 'object' || at === null) return undefined;
    if (Array.isArray(at) && !INDEX.test(token)) return undefined;
    if (!Object.hasOwn(at, token)) return undefined;
    at = (at as Record<string, unknown>)[token];
  }
  return at;
}
