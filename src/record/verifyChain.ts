import { clean } from '../text/clean.js';
import { hashOf, isCanonical, LONGEST_LINE, ORIGIN, parseLink } from './chain.js';
import { lines, type Line } from './lines.js';

/** A chain that holds from its first line to its last. */
export interface ChainHolds {
  readonly holds: true;
  readonly files: number;
  readonly lines: number;
  /** Hash of the last line, which no later line vouches for: compare it with one noted elsewhere. null: there is no line. */
  readonly last: string | null;
  /** null where the files begin with the chain's first line; else the name of the file before, which is not among them. */
  readonly continues: string | null;
}

/** The first line at which a chain does not hold. */
export interface ChainBreaks {
  readonly holds: false;
  readonly file: string;
  /** Counted from 1. */
  readonly line: number;
  /** What is wrong with it; fit for a screen. */
  readonly sentence: string;
}

/**
 * Checks that each line of a log carries the hash of the line before it, over all files, in bounded memory.
 *
 * A change, removal, insertion or exchange of lines is found, with two limits that every chain without a key has: lines cut
 * off at the end leave no trace, nor does a change of the last line alone (both change `last`), and who rewrites all
 * lines behind the changed one makes a chain that holds.
 *
 * @param files oldest first
 * @throws the system's error where a file cannot be read
 */
export async function verifyChain(files: readonly string[]): Promise<ChainHolds | ChainBreaks> {
  let last: string | null = null;
  let count = 0;
  let continues: string | null = null;
  for (const file of files) {
    for await (const line of lines(file)) {
      const breaks = (sentence: string): ChainBreaks => ({ holds: false, file, line: line.number, sentence });
      const text = line.bytes.toString();
      const fault = faultOf(line, text);
      if (fault !== null) return breaks(fault);
      const record = parseLink(text)!;
      if (last === null) {
        if (record.previous !== ORIGIN) {
          if (typeof record['from'] !== 'string') return breaks('The lines before this one are missing. If they are in an earlier file, name it, too.');
          continues = clean(record['from'], 200);
        }
      } else if (record.previous !== last) {
        const otherFile = line.number === 1;
        return breaks(
          record.previous === ORIGIN
            ? 'A new chain begins here, in the middle of this one.'
            : `It does not carry the hash of the line before it${otherFile ? ' (the last of the file before)' : ''}: that line was changed, or lines were removed, added or exchanged here.`,
        );
      }
      last = hashOf(line.bytes);
      count++;
    }
  }
  return { holds: true, files: files.length, lines: count, last, continues };
}

function faultOf({ kind, bytes }: Line, text: string): string | null {
  const sample = () => clean(bytes.toString('utf8', 0, 240), 60);
  if (kind === 'long') return `It is longer than a line of the log may be (${LONGEST_LINE} bytes).`;
  if (kind === 'torn') return `It is torn: the file ends in the middle of it. (kilter sets it aside at its next start.) It begins: ${sample()}`;
  const record = parseLink(text);
  if (record === null) return `It is no JSON object: ${sample()}`;
  if (record === undefined) return `It carries no hash of the line before it: ${sample()}`;
  if (!isCanonical(text, record) || Buffer.byteLength(text) !== bytes.length) return `It is not in canonical form (RFC 8785), so it was not written by kilter: ${sample()}`;
  return null;
}
