import { formatCount, formatDuration, formatOdds, formatValue } from '../engine/format.js';
import type { Normal, Probability, Question } from './oddsQuestion.js';

const PER_SECOND = 10; // what a sensor on a serial line commonly gives
const YEAR = 365.25 * 86_400_000;

/** The answer to people: how often, in odds and per cent, and how often that is at ten readings a second. */
export function probabilityWords(question: Exclude<Question, { kind: 'band' }>, { mean, sd }: Normal, { probability, rest, ln }: Probability): string[] {
  const what = part(question, mean === 0 && sd === 1 ? ' sigma' : '');
  if (rest < 1e-14) return [`All readings lie ${what}${rest > 0 ? ` but ${formatOdds(rest)}` : ''}.`];
  if (probability >= 0.5) return [`${share(probability, rest)} of readings lie ${what}; ${formatOdds(rest)} does not.`];
  if (ln === -Infinity) return [`No reading lies ${what}: the interval has no width.`];
  const odds = probability >= 1e-300 ? formatOdds(probability) : `1 in 1e${Math.round(-ln / Math.LN10)}`;
  const percent = probability >= 1e-6 ? ` (${percentage(probability)})` : '';
  const line = `${odds} readings lies ${what}${percent}.`;
  const every = 1000 / PER_SECOND / probability;
  return Number.isFinite(every) && probability < 0.05 ? [line, `At ${PER_SECOND} readings a second that is one every ${span(every)}.`] : [line];
}

/** The answer to `band`. */
export function bandWords(held: number, low: number, high: number, sigmas: number, { mean, sd }: Normal): string[] {
  const digits = (x: number): string => formatValue(x, sd / 50);
  return [
    `${share(held, 1 - held)} of readings lie between ${digits(low)} and ${digits(high)}.`,
    `That is ${digits(mean)} ± ${digits(sigmas * sd)}, or ${Number(sigmas.toPrecision(6))} sigma to each side.`,
  ];
}

function part(question: Exclude<Question, { kind: 'band' }>, unit: string): string {
  switch (question.kind) {
    case 'between':
      return `between ${question.a} and ${question.b}${unit}`;
    case 'beyond':
      return `farther than ${question.distance}${unit} from the mean, above or below`;
    default:
      return `${question.kind} ${question.x}${unit}`;
  }
}

/** A share of at least a half, with as many nines as it takes to see what is left. */
function share(p: number, rest: number): string {
  if (p < 0.5) return p >= 1e-6 ? percentage(p) : `A share of ${Number(p.toPrecision(3))}`;
  const decimals = Math.max(0, Math.min(14, 1 - Math.floor(Math.log10(rest * 100))));
  return `${Number((p * 100).toFixed(decimals))} %`;
}

const percentage = (p: number): string => `${Number((p * 100).toPrecision(3))} %`;

const span = (ms: number): string => (ms < 2 * YEAR ? formatDuration(ms) : `${formatCount(ms / YEAR)} years`);
