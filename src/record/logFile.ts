import { closeSync, fstatSync, ftruncateSync, openSync, readlinkSync, type Stats } from 'node:fs';
import { rename, stat } from 'node:fs/promises';
import { basename, dirname } from 'node:path';
import { clean } from '../text/clean.js';
import { UserError } from '../text/errors.js';
import { syncFolder, type Disk } from './disk.js';
import { createLog, openLog } from './logDescriptor.js';
import { nextRotatedName, rotatedFiles } from './logFiles.js';
import { readTail } from './tail.js';
import { setTornEndAside } from './tornEnd.js';

/** What an opened log's file held. */
export interface Found {
  /** Hash of the last whole line, in this file or, where this one has none, in the one rotated last; null: there is none. */
  readonly hash: string | null;
  /** Name of the rotated file that the chain comes from; null where it goes on in the same file, or begins. */
  readonly from: string | null;
  /** Bytes of a torn end that were set aside. */
  readonly tornBytes: number;
}

/** The open file was removed while it was written: what it held is gone, what was being written must be written again. */
export class Vanished extends Error {
  override readonly name = 'Vanished';
}

/**
 * The file under a log: it ends at a record's boundary at all times except within a `commit`. After a failure
 * `reopen` brings it back to the boundary.
 */
export class LogFile {
  private fd: number | null = null;
  private seen: Pick<Stats, 'dev' | 'ino'> | null = null;
  private isSuspect = false;
  private movedTo: string | null = null;
  /** The name of the file that was closed last. */
  private left: string | null = null;
  /** Bytes of whole, durable records. */
  end = 0;

  constructor(
    readonly path: string,
    private readonly disk: Disk,
    private readonly onNote: (sentence: string) => void,
    private readonly now: () => number,
  ) {}

  get isUsable(): boolean {
    return this.fd !== null && !this.isSuspect;
  }

  /** After a failure: the file is to be reopened. It stays open until then, for the system may give its number to another file. */
  suspect(): void {
    this.isSuspect = true;
  }

  /**
   * Opens or creates the file, reads its end, and sets a torn end aside.
   * @throws UserError where it is no alarm log; the system's error where it cannot be opened
   */
  open(): Found {
    this.drop();
    const fd = openLog(this.path);
    try {
      const status = fstatSync(fd);
      const tail = readTail(fd, status.size);
      if (!tail) {
        throw new UserError(
          `${clean(this.path, 300)} is not an alarm log: its last lines are none of a chain.`,
          'Name another file for the log, or move this one away.',
        );
      }
      const tornBytes = status.size - tail.end;
      if (tornBytes > 0) {
        const aside = basename(setTornEndAside(this.path, fd, tail.end, status.size, this.now()));
        this.onNote(`${clean(this.path, 300)} ended in a torn line of ${tornBytes} bytes, as after a loss of power. They lie in ${clean(aside, 300)}; every whole line is kept.`);
      }
      if (!tail.chained) {
        this.onNote(`The chain of ${clean(this.path, 300)} is broken near its end: a line was changed or removed. It goes on from its last line; kilter verify shows where it broke.`);
      }
      const before = tail.hash !== null ? { hash: tail.hash, from: null } : this.lastRotated();
      this.fd = fd;
      this.seen = status;
      this.end = tail.end;
      return { ...before, tornBytes };
    } catch (error) {
      closeSync(fd);
      throw error;
    }
  }

  /**
   * Opens the file again after a failure or after it was moved away.
   * @returns the name of the file that the chain comes from where this is another file than before, else null
   */
  async reopen(): Promise<string | null> {
    await createLog(this.path);
    const fd = openLog(this.path);
    let status: Stats;
    let isSame: boolean;
    try {
      status = fstatSync(fd);
      isSame = status.dev === this.seen?.dev && status.ino === this.seen.ino;
      if (isSame && status.size > this.end) ftruncateSync(fd, this.end); // part of a record, or lines that may not have lasted
      else if (isSame && status.size < this.end) this.noteShrunk(status.size);
    } catch (error) {
      tryClose(fd);
      throw error;
    }
    if (isSame) {
      this.drop();
      this.fd = fd;
      this.seen = status;
      return null;
    }
    tryClose(fd);
    this.open();
    if (this.end > 0) this.onNote(`Another file was put in the place of ${clean(this.path, 300)}. The chain goes on behind what it holds.`);
    return this.left;
  }

  /** Whether another file, or none, now has the log's name. */
  async isMoved(): Promise<boolean> {
    const there = await stat(this.path).catch((error: unknown) => {
      if ((error as NodeJS.ErrnoException).code === 'ENOENT') return null;
      throw error;
    });
    return !there || there.dev !== this.seen?.dev || there.ino !== this.seen.ino;
  }

  /**
   * Appends whole lines and waits until they are on the disk. When this fails the file is brought back to where it was.
   * @throws Vanished, or the system's error
   */
  async commit(lines: Buffer): Promise<void> {
    const { disk } = this;
    const fd = this.fd!;
    const expected = this.end + lines.length;
    try {
      for (let rest: Uint8Array = lines; rest.length > 0; ) {
        const taken = await disk.write(fd, rest);
        rest = rest.subarray(taken);
      }
      const [status] = await Promise.all([disk.fstat(fd), disk.fdatasync(fd)]);
      if (status.nlink === 0) throw new Vanished(`${clean(this.path, 300)} was removed while kilter was writing it.`);
      if (status.size < expected) this.noteShrunk(status.size);
      else if (status.size > expected) this.onNote(`Something else writes into ${clean(this.path, 300)}: ${status.size - expected} bytes in it are not kilter's.`);
      this.end = status.size;
    } catch (error) {
      await this.takeBack(fd);
      throw error;
    }
  }

  /**
   * Gives the file a name of its own with the time in it; never that of another file. The log itself is then to be reopened.
   */
  async moveAway(): Promise<void> {
    const to = nextRotatedName(this.path, this.now());
    await rename(this.path, to);
    this.movedTo = basename(to);
    await syncFolder(dirname(this.path));
  }

  /** Closes the file; what is on the disk stays as it is. */
  drop(): void {
    this.isSuspect = false;
    if (this.fd === null) return;
    this.left = this.currentName(this.fd);
    this.movedTo = this.seen = null;
    tryClose(this.fd);
    this.fd = null;
  }

  private async takeBack(fd: number): Promise<void> {
    try {
      const { size } = await this.disk.fstat(fd);
      if (size > this.end) await this.disk.ftruncate(fd, this.end);
    } catch {
      // `reopen` tries again before anything else is written
    }
  }

  /** The name that the open file has now, whoever renamed it (proc(5), fd); the log's own where the system does not tell. */
  private currentName(fd: number): string {
    if (this.movedTo !== null) return this.movedTo;
    try {
      return basename(readlinkSync(`/proc/self/fd/${fd}`).replace(/ \(deleted\)$/, ''));
    } catch {
      return basename(this.path);
    }
  }

  private lastRotated(): Pick<Found, 'hash' | 'from'> {
    const file = rotatedFiles(this.path).at(-1);
    if (file === undefined) return { hash: null, from: null };
    const fd = openSync(file, 'r');
    try {
      const tail = readTail(fd, fstatSync(fd).size);
      if (tail?.hash) return { hash: tail.hash, from: basename(file) };
      this.onNote(`${clean(file, 300)}, rotated last, holds no whole line: the chain begins anew.`);
      return { hash: null, from: null };
    } finally {
      closeSync(fd);
    }
  }

  private noteShrunk(size: number): void {
    this.onNote(`${clean(this.path, 300)} was cut to ${size} bytes by something else. The chain goes on; the lines before must be in a copy.`);
    this.end = size;
  }
}

function tryClose(fd: number): void {
  try {
    closeSync(fd);
  } catch {
    // a late error of the disk, which the next write will meet again
  }
}
