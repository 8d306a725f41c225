const POWERS = Float64Array.from({ length: 23 }, (_, power) => Number(`1e${power}`)); // 10^22 is the greatest exact one
const WORD = /^[+-]?(?:nan|inf|infinity)$/i;
const EXACT = 2 ** 53;

/** SCPI-1999 volume 1, 7.2.1: 9.91E37 stands for not-a-number, 9.9E37 and -9.9E37 for the infinities. */
const SCPI_NAN = 9.91e37;
const SCPI_INFINITY = 9.9e37;
const SCPI_SLACK = 1e32; // an instrument that rounds to single precision is off by up to 5e30

/**
 * Reads one number from bytes by the strict grammar, without allocating for plain decimals:
 *
 *     blanks [+-] (digits [. [digits]] | . digits) [(e|E) [+-] digits] blanks
 *
 * which holds the NR1, NR2 and NR3 forms of IEEE 488.2, or one of the words `nan`, `inf`, `infinity` in any case and
 * with an optional sign. Blanks are spaces and tabs. The value is the double nearest to the decimal, exactly as
 * `Number` gives it, save for the SCPI stand-ins (see {@link reading}). Nothing at all, or blanks, is no number.
 *
 * @param out its element 0 takes the value: finite, NaN (the instrument says: no number) or an infinity (over range)
 * @returns whether the bytes from start to before end were a number
 */
export function readNumber(bytes: Uint8Array, start: number, end: number, out: Float64Array): boolean {
  let at = start;
  let last = end;
  while (at < last && isBlank(bytes[at]!)) at++;
  while (last > at && isBlank(bytes[last - 1]!)) last--;
  const stop = scanNumber(bytes, at, last, out);
  return stop === last && stop > at ? true : readWord(bytes, at, last, out);
}

/**
 * Reads the longest number by the grammar of {@link readNumber}, without blanks or words, that begins at start.
 * @returns the position after it, or start where no number begins there
 */
export function scanNumber(bytes: Uint8Array, start: number, end: number, out: Float64Array): number {
  let at = start;
  let byte = at < end ? bytes[at]! : 0;
  const negative = byte === 0x2d;
  if (negative || byte === 0x2b) at++;

  let mantissa = 0;
  const whole = at;
  for (; at < end && isDigit((byte = bytes[at]!)); at++) mantissa = mantissa * 10 + (byte - 0x30);
  let digits = at - whole;
  let power = 0;
  if (at < end && bytes[at] === 0x2e) {
    const point = ++at;
    for (; at < end && isDigit((byte = bytes[at]!)); at++) mantissa = mantissa * 10 + (byte - 0x30);
    power = point - at;
    digits -= power;
  }
  if (digits === 0) return start;

  const exponentAt = scanExponent(bytes, at, end);
  if (exponentAt !== at) {
    power += exponent(bytes, at + 1, exponentAt);
    at = exponentAt;
  }
  // Both the mantissa and the power of ten are exact doubles here, so that the one rounding is the correct one (Clinger 1990).
  // A mantissa once rounded stays at 2^53 or above: the test also catches digits beyond the fifteenth.
  if (mantissa < EXACT && power >= -22 && power <= 22) {
    const size = power < 0 ? mantissa / POWERS[-power]! : mantissa * POWERS[power]!;
    out[0] = reading(negative ? -size : size);
  } else {
    out[0] = reading(Number(latin1(bytes, start, at)));
  }
  return at;
}

/**
 * The reading that a number stands for: the SCPI stand-ins 9.91E37 (not-a-number) and ±9.9E37 and beyond (over range)
 * become NaN and ±Infinity; every other number is itself.
 */
function reading(value: number): number {
  if (Math.abs(value) < SCPI_INFINITY - SCPI_SLACK) return value;
  if (Math.abs(value - SCPI_NAN) <= SCPI_SLACK) return NaN;
  return value > 0 ? Infinity : value < 0 ? -Infinity : NaN;
}

/**
 * Reads a number from a parsed JSON value: a number, or a string that is one by the strict grammar. Everything else
 * (null, true, '', a list) is none.
 */
export function readJsonNumber(value: unknown, out: Float64Array): boolean {
  if (typeof value === 'number') {
    out[0] = reading(value);
    return true;
  }
  if (typeof value !== 'string' || value.length > 400) return false;
  const bytes = Buffer.from(value, 'utf8');
  return readNumber(bytes, 0, bytes.length, out);
}

/** The end of `e[+-]digits` at the position, or the position itself where there is none. */
function scanExponent(bytes: Uint8Array, start: number, end: number): number {
  if (start >= end || (bytes[start]! | 0x20) !== 0x65) return start;
  let at = start + 1;
  if (at < end && (bytes[at] === 0x2b || bytes[at] === 0x2d)) at++;
  const digits = at;
  while (at < end && isDigit(bytes[at]!)) at++;
  return at > digits ? at : start;
}

function exponent(bytes: Uint8Array, start: number, end: number): number {
  const signed = bytes[start] === 0x2b || bytes[start] === 0x2d;
  let value = 0;
  for (let at = signed ? start + 1 : start; at < end && value < 1e6; at++) value = value * 10 + (bytes[at]! - 0x30);
  return bytes[start] === 0x2d ? -value : value;
}

function readWord(bytes: Uint8Array, start: number, end: number, out: Float64Array): boolean {
  if (end - start < 3 || end - start > 9) return false;
  const word = latin1(bytes, start, end);
  if (!WORD.test(word)) return false;
  const infinite = word.toLowerCase().includes('inf');
  out[0] = !infinite ? NaN : word.startsWith('-') ? -Infinity : Infinity;
  return true;
}

function latin1(bytes: Uint8Array, start: number, end: number): string {
  return Buffer.from(bytes.buffer, bytes.byteOffset + start, end - start).toString('latin1');
}

export function isDigit(byte: number): boolean {
  return byte >= 0x30 && byte <= 0x39;
}

export function isBlank(byte: number): boolean {
  return byte === 0x20 || byte === 0x09;
}
