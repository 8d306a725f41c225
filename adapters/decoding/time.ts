const ISO =
  /^(\d{4})-(\d{2})-(\d{2})(?:[T ](\d{2}):(\d{2})(?::(\d{2})(?:[.,](\d{1,12}))?)?(?:(Z)|([+-])(\d{2})(?::?(\d{2}))?)?)?$/i;
const EPOCH = /^[+-]?(?:\d+\.?\d*|\.\d+)(?:[eE][+-]?\d{1,2})?$/;
const MONTHS = [31, 28, 31, 30, 31, 30, 31, 31, 30, 31, 30, 31];

/** From this magnitude on an epoch number counts milliseconds (1e11 ms is March 1973, 1e11 s the year 5138). */
const MILLISECONDS_FROM = 1e11;
/** From this magnitude on it is no time at all: it may be microseconds or nanoseconds, which are not guessed at. */
const NO_TIME_FROM = 1e14;

/**
 * A time as devices, brokers and recordings write it, in milliseconds since 1970-01-01T00:00:00Z, with fractions of a
 * millisecond where they were given; NaN where it is none.
 *
 * Taken are ISO 8601 in its extended form (`2026-03-01T08:15:30.250Z`; a blank for the T, a comma for the point, seconds,
 * fraction, time or zone left out; an offset as +01:00, +0100 or +01) and seconds or milliseconds since the epoch, as a
 * number or as text. A time without a zone is UTC, so that a file means the same on every machine. Numbers below 1e11 in
 * magnitude are seconds, from there to below 1e14 milliseconds. Dates that the calendar lacks are refused; a leap
 * second (23:59:60 UTC) is the second after it, as in POSIX time.
 */
export function parseTime(time: string | number): number {
  if (typeof time === 'number') return epoch(time);
  if (time.length > 64) return NaN;
  const text = time.trim();
  const iso = ISO.exec(text);
  if (iso) return calendar(iso);
  return EPOCH.test(text) ? epoch(Number(text)) : NaN;
}

/** A time from a parsed JSON value: a number or a string by {@link parseTime}; NaN where it is anything else. */
export function readJsonTime(value: unknown): number {
  return typeof value === 'string' || typeof value === 'number' ? parseTime(value) : NaN;
}

function epoch(value: number): number {
  const size = Math.abs(value);
  if (!(size < NO_TIME_FROM)) return NaN;
  if (size >= MILLISECONDS_FROM) return value;
  // Whole microseconds first: 1700000000.123 * 1000 would leave the rounding of the product behind.
  return size < 9e9 ? Math.round(value * 1e6) / 1e3 : value * 1e3;
}

function calendar(part: RegExpExecArray): number {
  const number = (i: number): number => Number(part[i] ?? 0);
  const [year, month, day] = [number(1), number(2), number(3)];
  const [hour, minute, second] = [number(4), number(5), number(6)];
  const [zoneHour, zoneMinute] = [number(10), number(11)];
  if (month < 1 || month > 12 || day < 1 || day > daysIn(year, month)) return NaN;
  if (hour > 23 || minute > 59 || second > 60 || zoneHour > 23 || zoneMinute > 59) return NaN;
  const fraction = part[7] === undefined ? 0 : Number(`0.${part[7]}`) * 1e3;
  const offset = (zoneHour * 60 + zoneMinute) * (part[9] === '-' ? -1 : 1);
  const date = new Date(0);
  date.setUTCFullYear(year, month - 1, day); // Date.UTC takes the years 0 to 99 for 1900 to 1999
  date.setUTCHours(hour, minute - offset, second);
  if (second === 60 && !(date.getUTCHours() === 0 && date.getUTCMinutes() === 0)) return NaN;
  return date.getTime() + fraction;
}

function daysIn(year: number, month: number): number {
  const leap = (year % 4 === 0 && year % 100 !== 0) || year % 400 === 0;
  return month === 2 && leap ? 29 : MONTHS[month - 1]!;
}
