import { clean } from '../text/clean.js';
import { parseLink } from './chain.js';
import { lines } from './lines.js';

/** A record of a log, and where it stands. */
export interface LoggedRecord {
  readonly file: string;
  /** Counted from 1. */
  readonly line: number;
  readonly record: Readonly<Record<string, unknown>> & { readonly previous: string };
}

/**
 * The records of a log's files, one after the other, in bounded memory. The chain is not checked here (`verifyChain` does).
 * Texts in a record are as they stand in the file: clean them before they are shown.
 *
 * @param files oldest first
 * @param onSkip told of each line that is no record (torn, too long, no JSON, no hash), in a sentence
 * @throws the system's error where a file cannot be read
 */
export async function* readLog(files: readonly string[], onSkip: (sentence: string) => void): AsyncGenerator<LoggedRecord, void, undefined> {
  for (const file of files) {
    for await (const { number, bytes, kind } of lines(file)) {
      const record = kind === 'long' ? null : parseLink(bytes.toString());
      if (record && kind === 'whole') yield { file, line: number, record };
      else onSkip(`${clean(file, 300)}:${number}: not a record of an alarm log, left out: ${clean(bytes.toString('utf8', 0, 240), 60)}`);
    }
  }
}
