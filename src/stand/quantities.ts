/** Quantities that a stand file writes as words. Each parser gives null where the text is none. */

const SPANS: Readonly<Record<string, number>> = { ms: 1, s: 1000, min: 60_000, h: 3_600_000, d: 86_400_000 };
const SIZES: Readonly<Record<string, number>> = { B: 1, kB: 1e3, MB: 1e6, GB: 1e9 };
export const DURATION = /^\s*(\d{1,15}(?:\.\d{1,15})?)\s*(ms|s|min|h|d)\s*$/;
export const SIZE = /^\s*(\d{1,15}(?:\.\d{1,15})?)\s*(B|kB|MB|GB)\s*$/;
export const RATE = /^\s*(\d{1,15}(?:\.\d{1,15})?)\s+per\s+(hour|day|week|month)\s*$/;
const PERIODS: Readonly<Record<string, number>> = { hour: 3_600_000, day: 86_400_000, week: 604_800_000, month: 2_629_746_000 };

/** '100 ms', '2 s', '5 min', '1 h', '1 d' in ms. */
export function parseDuration(text: string): number | null {
  return scaled(DURATION.exec(text), SPANS);
}

/** '500 kB', '10 MB', '1 GB' in bytes. */
export function parseSize(text: string): number | null {
  return scaled(SIZE.exec(text), SIZES);
}

/** '1 per day', '0.5 per week': the mean time between false alarms in ms. A month is a twelfth of a mean year. */
export function parseRate(text: string): number | null {
  const match = RATE.exec(text);
  const count = match ? Number(match[1]) : 0;
  return count > 0 ? PERIODS[match![2]!]! / count : null;
}

function scaled(match: RegExpExecArray | null, units: Readonly<Record<string, number>>): number | null {
  if (!match) return null;
  const value = Number(match[1]) * units[match[2]!]!;
  return value > 0 ? value : null;
}

const LEARN = /^learn (\d{1,7})$/;

/** The readings that 'learn 500' asks for; null where the text says something else. */
export function learnCount(text: string): number | null {
  const match = LEARN.exec(text.trim());
  return match ? Number(match[1]) : null;
}

/** 'logger/flow' as source and field. */
export function splitOnce(from: string): readonly [source: string, field: string | null] {
  const slash = from.indexOf('/');
  return slash < 0 ? [from, null] : [from.slice(0, slash), from.slice(slash + 1)];
}
