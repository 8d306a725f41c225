/** Levels of the program log, in the words of syslog (RFC 5424). */
export type Level = 'info' | 'notice' | 'warning' | 'err';

/**
 * The program log on standard error: sentences for a person at a terminal, one JSON object a line otherwise.
 * It never throws: a closed standard error must not end a watch.
 */
export class ProgramLog {
  private readonly human = process.stderr.isTTY;

  constructor(private readonly now: () => number = () => Date.now()) {
    process.stderr.on('error', () => undefined);
  }

  /** @param fields further facts, written out where the log is JSON */
  write(level: Level, sentence: string, fields: Readonly<Record<string, unknown>> = {}): void {
    const time = new Date(this.now()).toISOString();
    const line = this.human
      ? `${time.slice(11, 19)} ${level === 'info' || level === 'notice' ? '' : level === 'err' ? 'ERROR ' : 'WARNING '}${sentence}`
      : JSON.stringify({ time, level, message: sentence, ...fields });
    try {
      process.stderr.write(line + '\n');
    } catch {
      // nobody reads it any more
    }
  }
}
