import { randomFillSync } from 'node:crypto';
import { existsSync, unlinkSync } from 'node:fs';
import { open, statfs, unlink } from 'node:fs/promises';
import { dirname } from 'node:path';

/** Bytes kept back on the disk for alarms. */
export const BALLAST = 1 << 16;

const MARGIN = 2; // as much again must be free before the reserve is made, or making it would fill the disk

/**
 * A reserve of disk beside the log: a file that is there to be deleted when the disk is full, so that alarms still get
 * through, and is made again when there is room.
 */
export class Ballast {
  private readonly path: string;
  /** Whether it was given up and has not been made again. */
  isGivenUp = false;

  constructor(
    log: string,
    private readonly bytes: number,
  ) {
    this.path = `${log}.ballast`;
  }

  private get isHeld(): boolean {
    return existsSync(this.path);
  }

  /** Gives the reserve up. @returns whether there was one */
  release(): boolean {
    try {
      unlinkSync(this.path);
      this.isGivenUp = true;
      return true;
    } catch {
      return false;
    }
  }

  /** Makes the reserve where it is missing and there is room. @returns whether it stands */
  async make(): Promise<boolean> {
    if (this.bytes === 0 || this.isHeld) return true;
    try {
      const { bavail, bsize } = await statfs(dirname(this.path));
      if (bavail * bsize < MARGIN * this.bytes) return false;
      const file = await open(this.path, 'wx', 0o640);
      try {
        await file.chmod(0o640);
        await file.writeFile(randomFillSync(Buffer.allocUnsafe(this.bytes))); // random: no file system can shrink or share it
        await file.datasync();
      } finally {
        await file.close();
      }
      this.isGivenUp = false;
      return true;
    } catch {
      await unlink(this.path).catch(() => undefined);
      return false;
    }
  }
}
