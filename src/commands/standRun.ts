import { createHash } from 'node:crypto';
import { readFileSync } from 'node:fs';
import type { Command } from 'commander';
import type { Source } from '../../adapters/source.js';
import { AlarmLog } from '../record/alarmLog.js';
import { AlarmBook } from '../stand/alarmBook.js';
import { requireTextbook } from '../stand/budget.js';
import { Clock } from '../stand/clock.js';
import { loadStand } from '../stand/load.js';
import { openSource, wantedBySource } from '../stand/open.js';
import { Runtime, type Kept } from '../stand/runtime.js';
import type { SourceState } from '../stand/sourceState.js';
import type { Stand } from '../stand/types.js';
import { version } from './version.js';

/** What a live verb (watch, guard, demo) does with what happens. All of it comes after the disk. */
export interface StandListener {
  onKept(event: Kept): void;
  onPhase(source: SourceState): void;
  /** The alarm log is in trouble (a sentence), or well again (null). */
  onLogTrouble(sentence: string | null): void;
  /** Something worth a line in the program log. */
  onNote(sentence: string): void;
}

export interface StandRun {
  readonly runtime: Runtime;
  readonly book: AlarmBook;
  readonly log: AlarmLog;
}

/**
 * The stand that a live verb was asked to watch: its argument, with the alarm log that `--log` names.
 * @throws UserError where the file has faults, or asks for what this version has not
 */
export function standToWatch(command: Command): Stand {
  const stand = loadStand(command.args[0]!);
  requireTextbook(stand);
  const { log } = command.opts<{ log?: string }>();
  return log === undefined ? stand : { ...stand, log: { ...stand.log, file: log } };
}

/**
 * Puts a stand together, ready to start: sources, engines and the alarm log, whose first line says which program
 * watches which stand file.
 * @param sources already made sources; where absent they are made from the stand
 * @param history readings of each channel kept for pictures
 * @throws UserError when the alarm log cannot be opened
 */
export async function standRun(
  stand: Stand,
  listener: StandListener,
  history: number,
  sources?: readonly Source[],
): Promise<StandRun> {
  const wanted = wantedBySource(stand.channels);
  const opened = sources ?? (await Promise.all(stand.sources.map((config) => openSource(config, wanted.get(config.name) ?? []))));
  const clock = new Clock((step) =>
    listener.onNote(
      `The system clock was set ${step > 0 ? 'forward' : 'back'} by ${(Math.abs(step) / 1000).toFixed(1)} s. Times go on by the clock as it was at the start; start kilter anew to follow the new one.`,
    ),
  );
  const book = new AlarmBook();
  const log = AlarmLog.open(stand.log.file, {
    maxBytes: stand.log.maxBytes,
    opening: {
      event: 'opened',
      time: new Date(clock.now()).toISOString(),
      version: version(),
      stand: stand.name,
      standFile: fingerprint(stand.file),
    },
    onTrouble: (sentence) => listener.onLogTrouble(sentence),
    onNote: (sentence) => listener.onNote(sentence),
  });
  const runtime = new Runtime({
    channels: stand.channels,
    sources: opened,
    ownTime: new Set(stand.sources.filter(({ kind }) => kind === 'recording').map(({ name }) => name)),
    log,
    history,
    clock,
    onPhase: (source) => listener.onPhase(source),
    onKept: (event) => {
      book.take(event);
      listener.onKept(event);
    },
  });
  return { runtime, book, log };
}

/** SHA-256 of the stand file as it is now, so that the log tells later against which limits was watched; null without a file. */
function fingerprint(file: string): string | null {
  try {
    return createHash('sha256').update(readFileSync(file)).digest('hex');
  } catch {
    return null; // a stand made in memory, as the demo's
  }
}
