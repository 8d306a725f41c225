import { between, cdf, centralQuantile, logUpperTail, twoSided, upperTail } from '../stats/normal.js';
import { clean } from '../text/clean.js';
import { UserError } from '../text/errors.js';
import { nearest } from '../text/nearest.js';

/** The normal distribution that is asked about, in the units of the channel. */
export interface Normal {
  readonly mean: number;
  readonly sd: number;
}

/** What is asked: the probability of a part of the line (`beyond`: both tails), or the central part that holds a share. */
export type Question =
  | { readonly kind: 'below' | 'above'; readonly x: number }
  | { readonly kind: 'between'; readonly a: number; readonly b: number }
  | { readonly kind: 'beyond'; readonly distance: number }
  | { readonly kind: 'band'; readonly share: number };

const TAKES = { below: ['X'], above: ['X'], between: ['A', 'B'], beyond: ['K'], band: ['P'] } as const;
const KINDS = Object.keys(TAKES) as (keyof typeof TAKES)[];

/** Reads a question from the words of the command line, or throws a `UserError`. */
export function readQuestion(kind: string, words: readonly string[]): Question {
  if (!isKind(kind)) {
    const near = nearest(kind, KINDS);
    throw new UserError(`odds does not know '${clean(kind, 40)}'.`, near ? `Did you mean '${near}'?` : `Ask one of: ${KINDS.join(', ')}.`);
  }
  const names = TAKES[kind];
  if (words.length !== names.length)
    throw new UserError(`odds ${kind} takes ${names.length === 1 ? 'one number' : 'two numbers'}, not ${words.length}.`, `Write: odds ${kind} ${names.join(' ')}.`);
  const [first, second] = words.map((word, i) => readNumber(word, names[i]!)) as [number, number];
  switch (kind) {
    case 'below':
    case 'above':
      return { kind, x: first };
    case 'between':
      if (first > second)
        throw new UserError(`The interval is empty: ${first} lies above ${second}.`, `Write the lower end first: odds between ${second} ${first}.`);
      return { kind, a: first, b: second };
    case 'beyond':
      if (first < 0) throw new UserError(`K is a distance from the mean and cannot be negative: ${first}.`, `Write: odds beyond ${-first}; or ask: odds below ${first}.`);
      return { kind, distance: first };
    case 'band':
      if (!(first > 0 && first < 1))
        throw new UserError(
          `P is the share of readings inside the band, above 0 and below 1: ${first} is not.`,
          first > 1 && first < 100 ? `For ${first} % write: odds band ${Number((first / 100).toPrecision(12))}.` : 'Write for instance: odds band 0.95.',
        );
      return { kind, share: first };
  }
}

const isKind = (word: string): word is keyof typeof TAKES => Object.hasOwn(TAKES, word);

/** A finite number in decimal notation, as `-1.5` or `1e-300`, or a `UserError` that names what was meant. */
export function readNumber(word: string, name: string): number {
  if (!/^[+-]?(\d+\.?\d*|\.\d+)(e[+-]?\d+)?$/i.test(word)) {
    const mend = /^[+-]?\d+,\d+$/.test(word) ? `Write a point: ${word.replace(',', '.')}.` : 'Write it as -1.5 or 2e-6.';
    throw new UserError(`${name} is not a number: '${clean(word, 40)}'.`, mend);
  }
  const value = Number(word);
  if (!Number.isFinite(value)) throw new UserError(`${name} is too large: ${clean(word, 40)}.`, 'The largest number is about 1.8e308.');
  return value;
}

/** `--sd`: above 0. */
export function readSd(word: string): number {
  const sd = readNumber(word, '--sd');
  if (!(sd > 0)) throw new UserError(`--sd must be above 0: ${sd} is not.`, 'A standard deviation is a spread, in the unit of the readings.');
  return sd;
}

/** The probability of the part asked for, that of all the rest, and the logarithm of the first also where it is below the smallest double. */
export interface Probability {
  readonly probability: number;
  readonly rest: number;
  readonly ln: number;
}

/** Each of the two probabilities is computed for itself: never 1 - p. */
export function probabilityOf(question: Exclude<Question, { kind: 'band' }>, { mean, sd }: Normal): Probability {
  const z = (x: number): number => (x - mean) / sd;
  switch (question.kind) {
    case 'below':
      return above(-z(question.x));
    case 'above':
      return above(z(question.x));
    case 'beyond': {
      const k = question.distance / sd;
      return { probability: twoSided(k), rest: between(-k, k), ln: Math.min(0, Math.LN2 + logUpperTail(k)) };
    }
    case 'between': {
      const [a, b] = [z(question.a), z(question.b)];
      const probability = between(a, b);
      const rest = cdf(a) + upperTail(b);
      if (probability > 0 || !(a < b)) return { probability, rest, ln: Math.log(probability) };
      const [near, far] = a > 0 ? [a, b] : [-b, -a];
      const ln = logUpperTail(near);
      return { probability, rest, ln: ln + Math.log(-Math.expm1(logUpperTail(far) - ln)) };
    }
  }
}

const above = (z: number): Probability => ({ probability: upperTail(z), rest: cdf(z), ln: logUpperTail(z) });

/** Ends of the central interval that holds the share, in units, and its half width in sigmas. */
export function bandOf(share: number, { mean, sd }: Normal): { readonly low: number; readonly high: number; readonly sigmas: number } {
  const sigmas = centralQuantile(share);
  return { low: mean - sigmas * sd, high: mean + sigmas * sd, sigmas };
}
