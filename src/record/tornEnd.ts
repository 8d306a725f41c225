import { closeSync, constants, existsSync, fchmodSync, fdatasyncSync, fsyncSync, ftruncateSync, openSync, readSync, renameSync, writeSync } from 'node:fs';
import { dirname } from 'node:path';
import { syncFolderNow } from './disk.js';
import { stamp } from './logFiles.js';

/**
 * Moves a log's torn end into a file of its own beside it, and cuts the log back to its last whole line. The bytes are
 * safe in their new place before they leave the old one.
 * @param end bytes of whole lines
 * @param size bytes of the log
 * @returns the new file
 */
export function setTornEndAside(log: string, fd: number, end: number, size: number, now: number): string {
  const torn = Buffer.allocUnsafe(size - end);
  for (let got = 0; got < torn.length; ) got += readSync(fd, torn, got, torn.length - got, end + got);
  const unfinished = `${log}.torn`;
  const aside = openSync(unfinished, constants.O_WRONLY | constants.O_CREAT | constants.O_TRUNC | constants.O_NOFOLLOW, 0o640);
  try {
    fchmodSync(aside, 0o640);
    for (let put = 0; put < torn.length; ) put += writeSync(aside, torn, put);
    fsyncSync(aside);
  } finally {
    closeSync(aside);
  }
  let time = now;
  while (existsSync(`${log}.torn-${stamp(time)}`)) time++;
  const name = `${log}.torn-${stamp(time)}`;
  renameSync(unfinished, name);
  syncFolderNow(dirname(log));
  ftruncateSync(fd, end);
  fdatasyncSync(fd);
  return name;
}
