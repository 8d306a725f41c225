import { existsSync } from 'node:fs';
import { resolve } from 'node:path';
import { isCompanion, logOfRotated, rotatedFiles } from '../record/logFiles.js';
import { placeOf } from '../record/place.js';
import { verifyChain } from '../record/verifyChain.js';
import { clean } from '../text/clean.js';
import { UserError } from '../text/errors.js';
import { ANSWER_IS_NO, FINE, parse, say, sayJson, verb } from './cli.js';

const HELP = `
Each line of an alarm log carries the hash (SHA-256) of the line before it. verify walks the chain through all
files and names the first line that does not hold. Files into which kilter rotated a log are found beside it;
files that another program rotated are to be named, oldest first.

What a chain cannot show: lines cut off at the very end, or a change of the last line alone. Note the last
hash elsewhere from time to time and compare it.

Only the chain is checked so far. That each alarm recomputes from its own evidence is not checked yet.

Exit status: 0 the chain holds, 1 it does not, 2 wrong use or no such file.`;

/** `kilter verify LOG...`: is the chain of the alarm log whole? */
export async function run(args: readonly string[]): Promise<number> {
  const command = verb('verify', 'check that the chain of an alarm log is whole')
    .argument('<log...>', 'alarm logs, or files that they were rotated into')
    .option('--json', 'print one JSON object')
    .addHelpText('after', HELP);
  const status = parse(command, args);
  if (status !== null) return status;
  const { json } = command.opts<{ json?: true }>();
  const result = await verified(command.args);
  if (json) sayJson({ ...result, checked: 'chain' });
  else if (!result.holds) say(`${clean(result.file, 300)}:${result.line}: the chain does not hold. ${result.sentence}`);
  else {
    say(`The chain holds: ${result.lines} lines in ${result.files} ${result.files === 1 ? 'file' : 'files'}.`);
    if (result.continues !== null) say(`It goes on from ${result.continues}, which is not among them.`);
    if (result.last !== null) say(`Last hash: ${result.last}`);
    say('Not checked: whether each alarm recomputes from its evidence.');
  }
  return result.holds ? FINE : ANSWER_IS_NO;
}

/** A log may be rotated while it is read: then the files are looked up again. */
async function verified(named: readonly string[]): ReturnType<typeof verifyChain> {
  for (let tries = 3; ; tries--) {
    const files = filesOf(named);
    try {
      const result = await verifyChain(files);
      if (result.holds || tries === 0 || filesOf(named).length === files.length) return result;
    } catch (error) {
      throw readable(error);
    }
  }
}

/** The files to read, oldest first: each log after those it was rotated into, none twice, and nothing that merely stands beside it. */
function filesOf(named: readonly string[]): string[] {
  const files = new Set<string>();
  const given = new Set(named.map((file) => resolve(file)));
  for (const file of given) {
    if (isCompanion(file) && given.size > 1) continue; // of a pattern such as alarms.log*
    if (!existsSync(file)) throw new UserError(`There is no file ${clean(file, 300)}.`, 'Name an alarm log.');
    const log = logOfRotated(file);
    if (log !== null && given.has(log)) continue; // comes with its log
    for (const rotated of log === null ? rotatedFiles(placeOf(file)) : []) files.add(rotated);
    files.add(file);
  }
  return [...files];
}

function readable(error: unknown): unknown {
  const { code, message } = error as NodeJS.ErrnoException;
  return code === undefined ? error : new UserError(`The log cannot be read: ${clean(message, 300)}.`, 'Name an alarm log that this user may read.');
}
