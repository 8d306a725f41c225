import { constants, fchmodSync, openSync } from 'node:fs';
import { open, type FileHandle } from 'node:fs/promises';
import { dirname } from 'node:path';
import { syncFolder, syncFolderNow } from './disk.js';
import { makeFoldersAbove } from './place.js';

const FLAGS = constants.O_RDWR | constants.O_APPEND | constants.O_NOFOLLOW;
const MODE = 0o640;

/** Opens a log's file for appending; creates it, mode 0640 whatever the umask, where it is missing. */
export function openLog(path: string): number {
  try {
    return openSync(path, FLAGS);
  } catch (error) {
    if ((error as NodeJS.ErrnoException).code !== 'ENOENT') throw error;
  }
  makeFoldersAbove(path);
  const fd = openSync(path, FLAGS | constants.O_CREAT | constants.O_EXCL, MODE);
  fchmodSync(fd, MODE);
  syncFolderNow(dirname(path));
  return fd;
}

/** Creates a log's file where it is missing, without holding up the readings while the disk works. */
export async function createLog(path: string): Promise<void> {
  makeFoldersAbove(path);
  let handle: FileHandle;
  try {
    handle = await open(path, 'wx', MODE);
  } catch (error) {
    if ((error as NodeJS.ErrnoException).code === 'EEXIST') return;
    throw error;
  }
  try {
    await handle.chmod(MODE);
  } finally {
    await handle.close();
  }
  await syncFolder(dirname(path));
}
