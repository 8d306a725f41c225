import { clean } from '../../src/text/clean.js';
import { UserError } from '../../src/text/errors.js';
import type { Wanted } from '../source.js';
import type { LineDecoder } from './lineDecoder.js';
import { isBlank, isDigit, readNumber, scanNumber } from './number.js';

const COMMA = 0x2c;
const SEMICOLON = 0x3b;
const EQUALS = 0x3d;
const COLON = 0x3a;

/**
 * Lines of names and numbers: `T=21.45 RH=40.1%`, `T: 21.45 degC; RH: 40.1`. Pairs are parted by blanks, commas or semicolons;
 * between name and number stands = or :, with or without blanks. A unit may follow the number directly (it begins with no
 * digit, sign, point or mark of a pair, and `0x1F` is no number with a unit); a word that is not followed by = or :
 * is let be. Decimals after a comma are refused, not cut off. Names are compared exactly. Of a name that comes twice the first counts.
 * @throws UserError where a channel does not say which name it wants
 */
export function compilePairs(wanted: readonly Wanted[]): LineDecoder {
  const names = wanted.map(({ channel, field }) => {
    if (field !== null && field !== '') return Buffer.from(field);
    throw new UserError(
      `Channel ${clean(channel, 60)} does not say which of the line's pairs it wants.`,
      'Write its name after the source, as in `from: source/T`.',
    );
  });
  const out = new Float64Array(1);
  const seenIn = new Float64Array(names.length);
  let turn = 0;

  return {
    decode(bytes, start, end, emit, refuse) {
      turn++;
      let at = start;
      while (at < end) {
        while (at < end && isSeparator(bytes[at]!)) at++;
        const name = at;
        while (at < end && !isSeparator(bytes[at]!) && !isMark(bytes[at]!)) at++;
        const nameEnd = at;
        while (at < end && isBlank(bytes[at]!)) at++;
        if (at >= end || !isMark(bytes[at]!)) continue; // a word, not a name
        const mark = at++;
        while (at < end && isBlank(bytes[at]!)) at++;
        const value = at;
        while (at < end && !isSeparator(bytes[at]!)) at++;
        if (value > mark + 1 && hasMark(bytes, value, at)) at = value; // `T= RH=40.1`: T has no number
        let taken = false;
        let good = false;
        for (let i = 0; i < names.length; i++) {
          if (seenIn[i] === turn || !isSame(bytes, name, nameEnd, names[i]!)) continue;
          seenIn[i] = turn;
          if (!taken) good = readValue(bytes, value, at, out) && !isDecimalComma(bytes, at, end);
          taken = true;
          if (good) emit(i, out[0]!, NaN);
          else refuse('not-a-number', bytes, name, at);
        }
      }
      for (let i = 0; i < names.length; i++) if (seenIn[i] !== turn) refuse('missing-field', bytes, start, end);
    },
  };
}

/** A number, a number and a unit, or one of the words that stand for a number. */
function readValue(bytes: Buffer, start: number, end: number, out: Float64Array): boolean {
  const stop = scanNumber(bytes, start, end, out);
  if (stop === start) return readNumber(bytes, start, end, out);
  if (stop === end) return true;
  const first = bytes[stop]!;
  if (isDigit(first) || first === 0x2b || first === 0x2d || first === 0x2e) return false;
  if ((first | 0x20) === 0x78 && stop + 1 < end && isHex(bytes[stop + 1]!)) return false;
  return !hasMark(bytes, stop, end); // two pairs run together, or a time of day
}

/** Whether the comma here parts a number's decimals, as in `T=21,45 RH=40,1`, and not two pairs, as in `1=21,2=40`. */
function isDecimalComma(bytes: Buffer, start: number, end: number): boolean {
  let at = start + 1;
  if (at >= end || bytes[start] !== COMMA || !isDigit(bytes[at]!)) return false;
  while (at < end && !isSeparator(bytes[at]!) && !isMark(bytes[at]!)) at++;
  while (at < end && isBlank(bytes[at]!)) at++;
  return at >= end || !isMark(bytes[at]!);
}

function hasMark(bytes: Buffer, start: number, end: number): boolean {
  for (let at = start; at < end; at++) if (isMark(bytes[at]!)) return true;
  return false;
}

function isSame(bytes: Buffer, start: number, end: number, name: Buffer): boolean {
  if (end - start !== name.length) return false;
  for (let i = 0; i < name.length; i++) if (bytes[start + i] !== name[i]) return false;
  return true;
}

function isSeparator(byte: number): boolean {
  return isBlank(byte) || byte === COMMA || byte === SEMICOLON;
}

function isMark(byte: number): boolean {
  return byte === EQUALS || byte === COLON;
}

function isHex(byte: number): boolean {
  return isDigit(byte) || ((byte | 0x20) >= 0x61 && (byte | 0x20) <= 0x66);
}
