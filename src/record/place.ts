import { chmodSync, lstatSync, mkdirSync, readlinkSync } from 'node:fs';
import { dirname, join, resolve } from 'node:path';
import { clean } from '../text/clean.js';
import { UserError } from '../text/errors.js';

const LINKS = 40; // as many as Linux follows

/**
 * The absolute path at which a log's file really lies: symbolic links of its last part are followed, so that what
 * stands beside the log (rotated files, lock) stands beside the file itself.
 * @throws UserError where something else than a regular file is there
 */
export function placeOf(file: string): string {
  let path = resolve(file);
  for (let i = 0; i < LINKS; i++) {
    const found = lstatSync(path, { throwIfNoEntry: false });
    if (!found || found.isFile()) return path;
    if (found.isSymbolicLink()) {
      path = resolve(dirname(path), readlinkSync(path));
      continue;
    }
    const kind = found.isDirectory() ? 'a folder' : 'not a regular file';
    const mend = found.isDirectory() ? `Name a file in it, such as ${clean(join(path, 'alarms.log'), 300)}.` : 'Name a file on a disk.';
    throw new UserError(`The alarm log ${clean(path, 300)} is ${kind}.`, mend);
  }
  throw new UserError(`The alarm log ${clean(file, 300)} is a symbolic link that leads in a circle.`, 'Name the file itself.');
}

/** Creates the folders above a file where they are missing, mode 0750 whatever the umask. */
export function makeFoldersAbove(file: string): void {
  const folder = dirname(file);
  const first = mkdirSync(folder, { recursive: true, mode: 0o750 });
  if (first === undefined) return;
  for (let made = folder; made.length >= first.length; made = dirname(made)) chmodSync(made, 0o750);
}
