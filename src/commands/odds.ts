import { FINE, parse, say, sayJson, verb } from './cli.js';
import { speaksUtf8 } from '../text/locale.js';
import { oddsPicture, type Part } from './oddsPicture.js';
import { bandOf, probabilityOf, readNumber, readQuestion, readSd, type Normal, type Question } from './oddsQuestion.js';
import { bandWords, probabilityWords } from './oddsWords.js';

const HELP = `
  odds below X          a reading lies below X
  odds above X          a reading lies above X
  odds between A B      a reading lies between A and B
  odds beyond K         a reading lies farther than K from the mean, on either side;
                        K counts sigmas, or is a distance in units where --mean or --sd is given
  odds band P           the central interval that holds the share P of readings

With --json: {"probability": p, "oneIn": 1/p}, or {"low": a, "high": b} for band. oneIn is null where p is so small
that 1/p is no double (p below 5.6e-309, also p = 0). Probabilities keep their full relative precision however
small. Numbers are read as double precision.

Examples: kilter odds beyond 3; kilter odds between 40.5 42 --mean 41.2 --sd 0.31; kilter odds below -4.5`;

/** `kilter odds`: the normal distribution as a working tool. */
// eslint-disable-next-line @typescript-eslint/require-await -- the contract of a verb
export async function run(args: readonly string[]): Promise<number> {
  const command = verb('odds', 'probabilities of the normal distribution, and the limits that hold a share')
    .argument('<question>', 'below, above, between, beyond or band')
    .argument('[numbers...]', 'in units of the readings')
    .option('--mean <m>', 'mean of the readings', '0')
    .option('--sd <s>', 'standard deviation of the readings, above 0', '1')
    .option('--ascii', 'draw with ASCII characters only')
    .option('--json', 'print one JSON object')
    .addHelpText('after', HELP);
  const status = parse(command, args);
  if (status !== null) return status;
  const options = command.opts<{ mean: string; sd: string; ascii?: true; json?: true }>();
  const [kind, ...words] = command.args;
  const normal: Normal = { mean: readNumber(options.mean, '--mean'), sd: readSd(options.sd) };
  const question = readQuestion(kind!, words);
  const answer = answerTo(question, normal);
  if (options.json) sayJson(answer.json);
  else {
    const utf8 = !options.ascii && speaksUtf8(process.env);
    for (const line of [...answer.words, '', ...oddsPicture(answer.part, normal, utf8)]) say(utf8 ? line : line.replaceAll('±', '+-'));
  }
  return FINE;
}

interface Answer {
  readonly json: Readonly<Record<string, number | null>>;
  readonly words: readonly string[];
  readonly part: Part;
}

/** The answer to a question: for machines, in words, and the part of the line that the picture shades. */
export function answerTo(question: Question, normal: Normal): Answer {
  if (question.kind === 'band') {
    const { low, high, sigmas } = bandOf(question.share, normal);
    return {
      json: { low, high, sigmas },
      words: bandWords(question.share, low, high, sigmas, normal),
      part: { from: low, to: high, outside: false },
    };
  }
  const found = probabilityOf(question, normal);
  const { probability } = found;
  const oneIn = 1 / probability;
  return {
    json: { probability, oneIn: Number.isFinite(oneIn) ? oneIn : null },
    words: probabilityWords(question, normal, found),
    part: partOf(question, normal),
  };
}

function partOf(question: Exclude<Question, { kind: 'band' }>, { mean }: Normal): Part {
  switch (question.kind) {
    case 'below':
      return { from: -Infinity, to: question.x, outside: false };
    case 'above':
      return { from: question.x, to: Infinity, outside: false };
    case 'between':
      return { from: question.a, to: question.b, outside: false };
    case 'beyond':
      return { from: mean - question.distance, to: mean + question.distance, outside: true };
  }
}
