import { closeSync, openSync, statSync, writeSync } from 'node:fs';
import { realDisk, type Disk } from '../../src/record/disk.js';

/** What goes wrong at a call: nothing, or a fault as the system makes it. */
export type Fault = 'none' | 'short' | 'full' | 'short then full' | 'sync' | 'no way back' | 'quota';

export function failure(code: string): NodeJS.ErrnoException {
  return Object.assign(new Error(`${code}: made for a test`), { code });
}

/**
 * A real disk with faults that no program can make to order. A sync that fails also loses what was written, as Linux
 * does: the pages count as clean afterwards, and what is read back later may be anything.
 * @param next asked before each commit
 */
export function faultyDisk(file: string, next: () => Fault): Disk {
  let fault: Fault = 'none';
  let isFirst = true;
  return {
    write: (fd, bytes) => {
      if (isFirst) fault = next();
      isFirst = false;
      const part = bytes.subarray(0, Math.max(1, bytes.length >> 1));
      switch (fault) {
        case 'short':
          return realDisk.write(fd, part);
        case 'short then full':
        case 'no way back': {
          const taken = realDisk.write(fd, part);
          if (fault === 'short then full') fault = 'full';
          else fault = 'quota';
          return taken;
        }
        case 'full':
          isFirst = true;
          return Promise.reject(failure('ENOSPC'));
        case 'quota':
          isFirst = true;
          return Promise.reject(failure('EDQUOT'));
        default:
          return realDisk.write(fd, bytes);
      }
    },
    fdatasync: (fd) => {
      isFirst = true;
      if (fault !== 'sync') return realDisk.fdatasync(fd);
      fault = 'none';
      const { size } = statSync(file);
      const hole = openSync(file, 'r+');
      writeSync(hole, Buffer.alloc(Math.min(size, 30)), 0, Math.min(size, 30), Math.max(0, size - 30));
      closeSync(hole);
      return Promise.reject(failure('EIO'));
    },
    ftruncate: (fd, size) => (fault === 'quota' ? Promise.reject(failure('EIO')) : realDisk.ftruncate(fd, size)),
    fstat: (fd) => realDisk.fstat(fd),
  };
}
