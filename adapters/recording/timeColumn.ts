import { parseTime } from '../decoding/time.js';
import { readNumber } from '../decoding/number.js';

/** Epoch numbers from this magnitude on count milliseconds, below it seconds: 1e11 ms is March 1973, 1e11 s the year 5138. */
const MILLISECONDS_FROM = 1e11;
/** From this magnitude on it is no time: it may be microseconds or nanoseconds, which are not guessed at. */
const NO_TIME_FROM = 1e14;
const DAY = 86_400_000;

/**
 * Reads a recording's times from bytes: ISO 8601, or seconds or milliseconds since the epoch. Which of the two epoch
 * units it is, the first reading decides, so that a run that begins at 0 s does not change its unit on the way.
 */
export class TimeColumn {
  private readonly number = new Float64Array(1);
  private scale = 0; // ms a unit, once known
  private readonly date = new Uint8Array(10);
  private dateMs = NaN;

  /** @returns ms since the epoch; NaN where the bytes are no time */
  read(bytes: Buffer, start: number, end: number): number {
    const whole = wholeNumber(bytes, start, end);
    if (whole >= 0) return this.epoch(whole);
    if (end - start >= 20 && bytes[start + 4] === 0x2d && bytes[end - 1] === 0x5a) {
      const quick = this.iso(bytes, start, end);
      if (quick === quick) return quick;
    }
    if (readNumber(bytes, start, end, this.number)) return this.epoch(this.number[0]!);
    return parseTime(bytes.toString('latin1', start, Math.min(end, start + 64)));
  }

  epoch(value: number): number {
    if (!(Math.abs(value) < NO_TIME_FROM)) return NaN;
    if (this.scale === 0) this.scale = Math.abs(value) < MILLISECONDS_FROM ? 1000 : 1;
    if (this.scale === 1) return value;
    if (Math.abs(value) >= MILLISECONDS_FROM) return NaN; // a year after 5138: the unit has changed on the way
    return Math.abs(value) < 9e9 ? Math.round(value * 1e6) / 1e3 : value * 1e3; // to whole microseconds
  }

  /** `YYYY-MM-DDThh:mm:ss[.f{1,3}]Z`, the form that programs write; the day is worked out once. NaN where it is another. */
  private iso(bytes: Buffer, start: number, end: number): number {
    let same = true;
    for (let i = 0; i < 10; i++) {
      if (bytes[start + i] !== this.date[i]) {
        same = false;
        break;
      }
    }
    if (!same) {
      bytes.copy(this.date, 0, start, start + 10);
      this.dateMs = parseTime(bytes.toString('latin1', start, start + 10));
    }
    const two = (at: number): number => {
      const tens = bytes[start + at]! - 0x30;
      const ones = bytes[start + at + 1]! - 0x30;
      return tens >= 0 && tens <= 9 && ones >= 0 && ones <= 9 ? tens * 10 + ones : NaN;
    };
    if (bytes[start + 10] !== 0x54 || bytes[start + 13] !== 0x3a || bytes[start + 16] !== 0x3a) return NaN;
    const [hour, minute, second] = [two(11), two(14), two(17)];
    if (!(hour <= 23 && minute <= 59 && second <= 59)) return NaN;
    let fraction = 0;
    const digits = end - 1 - (start + 20);
    if (end - 1 > start + 19) {
      if (bytes[start + 19] !== 0x2e || digits < 1 || digits > 3) return NaN;
      for (let i = 0; i < digits; i++) {
        const digit = bytes[start + 20 + i]! - 0x30;
        if (digit < 0 || digit > 9) return NaN;
        fraction = fraction * 10 + digit;
      }
      for (let i = digits; i < 3; i++) fraction *= 10;
    }
    const time = this.dateMs + hour * 3_600_000 + minute * 60_000 + second * 1000 + fraction;
    return time < this.dateMs + DAY ? time : NaN;
  }
}

/** Up to fifteen digits and nothing else, as most epoch times are, exactly; -1 where the bytes are something else. */
function wholeNumber(bytes: Buffer, start: number, end: number): number {
  if (end - start > 15 || end === start) return -1;
  let value = 0;
  for (let at = start; at < end; at++) {
    const digit = bytes[at]! - 0x30;
    if (digit < 0 || digit > 9) return -1;
    value = value * 10 + digit;
  }
  return value;
}
