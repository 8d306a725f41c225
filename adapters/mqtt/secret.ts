import { readFileSync } from 'node:fs';
import { clean } from '../../src/text/clean.js';
import { UserError } from '../../src/text/errors.js';
import type { Secret } from '../options.js';

/**
 * Fetches a secret from the environment or a file, without the line end with which editors close a file. It goes nowhere
 * but to the broker: no message holds it.
 * @param what for the sentence, such as 'password'
 * @throws UserError where it is not there
 */
export function fetchSecret(secret: Secret | null, what: string, source: string): string | null {
  if (secret === null) return null;
  const whose = `${what} of the source ${clean(source, 60)}`;
  if ('env' in secret) {
    const value = process.env[secret.env];
    if (value === undefined || value === '')
      throw new UserError(`The ${whose} is to come from the variable ${clean(secret.env, 60)}, which is not set.`, 'Set it before kilter starts.');
    return value;
  }
  const value = readOrSay(secret.file, whose).toString('utf8').replace(/\r?\n$/, '');
  if (value === '') throw new UserError(`The file with the ${whose}, ${clean(secret.file, 200)}, is empty.`, 'Write it there, on one line.');
  return value;
}

/** A file that a source needs. @throws UserError where it cannot be read */
export function readOrSay(file: string, what: string): Buffer {
  try {
    return readFileSync(file);
  } catch (error) {
    const { code } = error as NodeJS.ErrnoException;
    const why =
      code === 'ENOENT'
        ? 'is not there'
        : code === 'EACCES'
          ? 'may not be read by this user'
          : code === 'EISDIR'
            ? 'is a folder'
            : `cannot be read (${code ?? 'unknown reason'})`;
    throw new UserError(`The file with the ${what}, ${clean(file, 200)}, ${why}.`, 'Look at its path and its permissions.');
  }
}
