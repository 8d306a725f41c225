import { formatDuration } from '../engine/format.js';
import type { Kept } from '../stand/runtime.js';
import { closeDeadTerminalsAtExit } from '../screen/terminalGone.js';
import { UserError } from '../text/errors.js';
import { FAULT, FINE, leaveSoon, parse, verb } from './cli.js';
import { ProgramLog } from './programLog.js';
import { standRun, standToWatch, type StandListener, type StandRun } from './standRun.js';

const STATUS_EACH = 60_000;
const CAUTION = 'kilter is no safety system: interlocks, relief devices, local codes and licensed practice come first.';

/** `kilter guard STAND`: the watch without a screen, for a rig with nobody there. */
export async function run(args: readonly string[]): Promise<number> {
  const command = verb('guard', 'Watches a stand without a screen: alarms go to the alarm log, one status line a minute to standard error.')
    .argument('<stand>', 'the stand file')
    .option('--log <file>', 'the alarm log, instead of the one the stand file names')
    .addHelpText('after', `\nTERM or INT ends it (status 0, all alarms on disk); HUP begins a new alarm log file.\n${CAUTION}`);
  const done = parse(command, args);
  if (done !== null) return done;
  const stand = standToWatch(command);
  const program = new ProgramLog();
  program.write('notice', CAUTION);
  return guard(await standRun(stand, programListener(program), 0), program);
}

/** What the program log says of a stand. */
export function programListener(program: ProgramLog): StandListener {
  return {
    onKept: (event: Kept) => program.write(event.event === 'raised' ? 'warning' : 'info', event.sentence, tellTale(event)),
    onPhase: ({ name, phase, sentence }) =>
      program.write(phase === 'lost' ? 'warning' : 'info', `source ${name}: ${sentence}`, { source: name, phase }),
    onLogTrouble: (sentence) =>
      sentence === null ? program.write('notice', 'The alarm log is written again.') : program.write('err', sentence),
    onNote: (sentence) => program.write('notice', sentence),
  };
}

function tellTale(event: Kept): Record<string, unknown> {
  const { channel } = event;
  return event.event === 'band' ? { event: event.event, channel } : { event: event.event, channel, alarm: event.alarm, detector: event.detector };
}

/**
 * Runs until every source has ended or a signal comes.
 * @param until ends the watch by itself after so many ms
 * @returns the exit status
 */
export async function guard(standRun: StandRun, program: ProgramLog, until?: number): Promise<number> {
  const { runtime, book, log } = standRun;
  const startedAt = runtime.clock.now();
  const status = setInterval(() => program.write('info', ...statusLine(standRun, startedAt)), STATUS_EACH);
  const onHangUp = (): void => log.rotate();
  process.on('SIGHUP', onHangUp);
  let timer: NodeJS.Timeout | undefined;
  closeDeadTerminalsAtExit();
  const ending = new Promise<string>((resolve) => {
    for (const signal of ['SIGTERM', 'SIGINT'] as const) process.once(signal, () => resolve(`ended by ${signal}`));
    if (until !== undefined) timer = setTimeout(() => resolve('the time asked for is over'), until);
    runtime.ended().then(
      () => resolve('every source has ended'),
      () => undefined,
    );
  });
  try {
    runtime.start();
    const why = await ending;
    await runtime.stop();
    program.write('notice', `Watched for ${formatDuration(runtime.clock.now() - startedAt)}: ${runtime.readings} readings, ${book.raisedCount} alarms; ${why}.`);
    return FINE;
  } catch (error) {
    if (error instanceof UserError) throw error;
    program.write('err', `A fault inside kilter ended the watch: ${error instanceof Error ? error.message : String(error)}`);
    await runtime.stop();
    return FAULT;
  } finally {
    clearInterval(status);
    clearTimeout(timer);
    leaveSoon();
    process.off('SIGHUP', onHangUp);
  }
}

function statusLine({ runtime, book }: StandRun, startedAt: number): [string, Record<string, unknown>] {
  const open = runtime.sources.filter(({ phase }) => phase === 'open').length;
  const faults = runtime.sources.reduce((sum, { faultCount }) => sum + faultCount, 0);
  const settling = runtime.posts.filter(({ channel }) => channel.settled !== null).length;
  const facts = {
    readings: runtime.readings,
    alarmsRaised: book.raisedCount,
    alarmsStanding: book.standingCount,
    channels: runtime.posts.length,
    settling,
    sourcesOpen: open,
    sources: runtime.sources.length,
    faults,
    watchedFor: runtime.clock.now() - startedAt,
  };
  const words =
    `${facts.readings} readings, ${facts.alarmsStanding} alarms stand (${facts.alarmsRaised} raised), ` +
    `${open} of ${facts.sources} sources open, ${settling} of ${facts.channels} channels settling, ${faults} unreadable.`;
  return [words, facts];
}
