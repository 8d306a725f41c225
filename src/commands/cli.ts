import { Command, CommanderError } from 'commander';
import { UserError } from '../text/errors.js';

/** Exit statuses, fixed: scripts rely on them. */
export const FINE = 0;
export const ANSWER_IS_NO = 1;
export const WRONG_USE = 2;
export const FAULT = 3;

/** A verb's own parser: throws instead of exiting, so that every wrong use ends with the one exit status for it. */
export function verb(name: string, summary: string): Command {
  return new Command(name)
    .description(summary)
    .exitOverride()
    .showHelpAfterError(`(kilter ${name} --help shows how it is used)`)
    .configureOutput({ outputError: (text, write) => write(text.replace(/^error: /, '')) });
}

/**
 * Parses a verb's arguments.
 * @returns the exit status when there is nothing more to do (help was asked for, or the use was wrong), else null
 */
export function parse(command: Command, args: readonly string[]): number | null {
  try {
    command.parse(args, { from: 'user' });
    return null;
  } catch (error) {
    if (!(error instanceof CommanderError)) throw error;
    return error.exitCode === 0 ? FINE : WRONG_USE;
  }
}

/** Turns whatever ended a verb into sentences on standard error and an exit status. */
export function explain(error: unknown): number {
  if (error instanceof UserError) {
    process.stderr.write(`kilter: ${error.message}\n`);
    return WRONG_USE;
  }
  const code = (error as NodeJS.ErrnoException | null)?.code;
  if (code === 'EPIPE') return FINE; // the reader of our output has gone, as `head` does
  const detail = error instanceof Error ? (process.env['KILTER_TRACE'] ? error.stack : error.message) : String(error);
  process.stderr.write(`kilter: a fault inside kilter: ${detail}\n(set KILTER_TRACE=1 to see where.)\n`);
  return FAULT;
}

/** Writes one line of text to standard output. */
export function say(text = ''): void {
  process.stdout.write(text + '\n');
}

/** Writes one JSON value as a line to standard output. */
export function sayJson(value: unknown): void {
  process.stdout.write(JSON.stringify(value) + '\n');
}

/**
 * To be called when a live verb has ended and everything is on disk: what still holds the process, such as a terminal that
 * no longer reads or a port that does not close, is given a moment and no more.
 */
export function leaveSoon(): void {
  setTimeout(() => process.exit(), 300).unref();
}
