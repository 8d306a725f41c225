import { closeSync, fdatasync, fstat, fsync, fsyncSync, ftruncate, open, openSync, close, write, type Stats } from 'node:fs';
import { promisify } from 'node:util';

/** The calls through which log lines reach the disk. Each may fail as the system's own call does. */
export interface Disk {
  /** Appends; may take fewer bytes than it was given. @returns bytes taken */
  write(fd: number, bytes: Uint8Array): Promise<number>;
  fdatasync(fd: number): Promise<void>;
  ftruncate(fd: number, size: number): Promise<void>;
  fstat(fd: number): Promise<Stats>;
}

const writing = promisify(write);
const stating = promisify(fstat) as (fd: number) => Promise<Stats>;

export const realDisk: Disk = {
  write: async (fd, bytes) => (await writing(fd, bytes, 0, bytes.length, null)).bytesWritten,
  fdatasync: promisify(fdatasync),
  ftruncate: promisify(ftruncate),
  fstat: stating,
};

/** Makes a new or a vanished name in a folder last over a loss of power. */
export async function syncFolder(folder: string): Promise<void> {
  const fd = await promisify(open)(folder, 'r');
  try {
    await promisify(fsync)(fd);
  } finally {
    await promisify(close)(fd);
  }
}

export function syncFolderNow(folder: string): void {
  const fd = openSync(folder, 'r');
  try {
    fsyncSync(fd);
  } finally {
    closeSync(fd);
  }
}
