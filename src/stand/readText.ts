import { closeSync, openSync, readSync } from 'node:fs';
import { clean } from '../text/clean.js';
import { UserError } from '../text/errors.js';

const LARGEST = 1 << 20;

/**
 * The text of a stand file: UTF-8, at most 1 MiB. No more is read than that, even of a device that never ends.
 * @throws UserError where there is none
 */
export function readText(file: string): string {
  const name = clean(file, 200);
  const bytes = readBytes(file, name);
  if (bytes.length > LARGEST) throw new UserError(`${name} is larger than 1 MiB, too large for a stand file.`, 'Was a recording meant? kilter replay reads recordings.');
  let text: string;
  try {
    text = new TextDecoder('utf-8', { fatal: true }).decode(bytes);
  } catch {
    throw new UserError(`${name} is not written in UTF-8.`, 'Save it as UTF-8 text.');
  }
  if (text.trim() === '') throw new UserError(`${name} is empty.`, 'A stand file has at least stand, sources and channels; config/ holds examples.');
  return text;
}

function readBytes(file: string, name: string): Buffer {
  try {
    const descriptor = openSync(file, 'r');
    try {
      const bytes = Buffer.allocUnsafe(LARGEST + 1);
      let length = 0;
      for (let read = -1; read !== 0 && length < bytes.length; length += read) read = readSync(descriptor, bytes, length, bytes.length - length, null);
      return bytes.subarray(0, length);
    } finally {
      closeSync(descriptor);
    }
  } catch (error) {
    throw unreadable((error as NodeJS.ErrnoException).code, name);
  }
}

function unreadable(code: string | undefined, name: string): UserError {
  switch (code) {
    case 'ENOENT':
    case 'ENOTDIR':
      return new UserError(`There is no file ${name}.`, 'Name a stand file; config/ holds examples.');
    case 'EISDIR':
      return new UserError(`${name} is a folder.`, 'Name a stand file in it.');
    case 'EACCES':
      return new UserError(`${name} may not be read by this user.`, 'Give it read permission (chmod).');
    default:
      return new UserError(`${name} cannot be read (${code ?? 'unknown reason'}).`);
  }
}
