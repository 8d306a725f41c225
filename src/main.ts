#!/usr/bin/env node
import { explain, WRONG_USE } from './commands/cli.js';
import { VERBS } from './commands/verbs.js';

const OVERVIEW = `kilter watches a stand of sensors and says when a channel leaves its normal band.

  kilter <verb> [arguments] [--json]

${VERBS.map(({ name, use }) => `  ${name.padEnd(9)} ${use}`).join('\n')}

  kilter <verb> --help tells how a verb is used. Exit status: 0 fine, 1 the answer is no, 2 wrong use, 3 a fault.
  kilter is no safety system: interlocks, relief devices, local codes and licensed practice come first.
`;

async function main(args: readonly string[]): Promise<number> {
  const [name, ...rest] = args;
  if (name === undefined || name === '--help' || name === '-h' || name === 'help') {
    process.stdout.write(OVERVIEW);
    return name === undefined ? WRONG_USE : 0;
  }
  if (name === '--version' || name === '-V') {
    const { version } = await import('./commands/version.js');
    process.stdout.write(version() + '\n');
    return 0;
  }
  const found = VERBS.find((candidate) => candidate.name === name);
  if (!found) {
    const [{ nearest }, { clean }] = await Promise.all([import('./text/nearest.js'), import('./text/clean.js')]);
    const near = nearest(name, VERBS.map((candidate) => candidate.name));
    process.stderr.write(`kilter: there is no verb '${clean(name, 40)}'.${near ? ` Did you mean '${near}'?` : ''} kilter --help lists them.\n`);
    return WRONG_USE;
  }
  return (await found.load()).run(rest);
}

process.stdout.on('error', (error: NodeJS.ErrnoException) => {
  if (error.code === 'EPIPE') process.exit(0); // the reader of our output has gone
  throw error;
});
main(process.argv.slice(2)).then(
  (status) => (process.exitCode = status),
  (error: unknown) => (process.exitCode = explain(error)),
);
