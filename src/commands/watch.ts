import { watchPrice } from '../stand/price.js';
import type { Stand } from '../stand/types.js';
import { FINE, leaveSoon, parse, verb } from './cli.js';
import { StandViewer } from './standView.js';
import { standRun, standToWatch, type StandListener } from './standRun.js';
import type { Source } from '../../adapters/source.js';

/** Readings of each channel that the screen's pictures may show. */
export const TREND = 2000;

/** `kilter watch STAND`: the live screen. */
export async function run(args: readonly string[]): Promise<number> {
  const command = verb('watch', 'Watches a stand on the terminal. Alarms go to the alarm log first, then to the screen.')
    .argument('<stand>', 'the stand file')
    .option('--log <file>', 'the alarm log, instead of the one the stand file names');
  const done = parse(command, args);
  if (done !== null) return done;
  return watch(standToWatch(command));
}

/**
 * The screen on a stand, until the user quits.
 * @param extra what only the demo has: sources already made, further words for the status line, an end by itself
 */
export async function watch(
  stand: Stand,
  extra: { sources?: readonly Source[]; notice?: () => string | null; until?: number } = {},
): Promise<number> {
  const { openScreen, checkTerminal } = await import('../screen/shell.js');
  checkTerminal(process.env, process.stdin, process.stdout); // before anything is opened or written
  const notes: string[] = [];
  const pending: { trouble: string | null } = { trouble: null };
  let viewer: StandViewer | null = null;
  let tell: (sentence: string) => void = (sentence) => notes.push(sentence);
  const listener: StandListener = {
    onKept: () => undefined, // the book has it; the next frame shows it
    onPhase: () => undefined,
    onLogTrouble: (sentence) => {
      pending.trouble = sentence;
      if (viewer) viewer.logTrouble = sentence;
    },
    onNote: (sentence) => tell(sentence),
  };
  const { runtime, book } = await standRun(stand, listener, TREND, extra.sources);
  const price = watchPrice(stand);
  viewer = new StandViewer(stand.name, runtime, book, TREND, () => extra.notice?.() ?? price);
  viewer.logTrouble = pending.trouble;
  const shown = viewer;
  const ended = await new Promise<NodeJS.Signals | null>((resolve, reject) => {
    const screen = openScreen({
      env: process.env,
      view: () => shown.view(),
      select: (channel) => shown.select(channel),
      onQuit: () => resolve(null),
      onSignal: resolve,
      onFatal: reject,
    });
    tell = (sentence) => screen.message(sentence);
    for (const note of notes) screen.message(note);
    if (extra.until !== undefined)
      setTimeout(() => {
        screen.close();
        resolve(null);
      }, extra.until);
    runtime.start();
  }).catch(async (error: unknown) => {
    await runtime.stop(); // what was raised is on disk before anything is said
    throw error;
  });
  await runtime.stop();
  if (ended !== null) process.stderr.write(`kilter: ended by ${ended}.\n`);
  process.stderr.write(`kilter: ${runtime.readings} readings, ${book.raisedCount} alarms; the alarm log is ${stand.log.file}\n`);
  leaveSoon();
  return FINE;
}
