import { clean } from '../text/clean.js';
import { UserError } from '../text/errors.js';

/** Whether an error says that there is no room: then the reserve helps. */
export function isFull(error: unknown): boolean {
  const { code } = error as NodeJS.ErrnoException;
  return code === 'ENOSPC' || code === 'EDQUOT';
}

/** Whether the file may not grow: then a new one helps. */
export function isTooLarge(error: unknown): boolean {
  return (error as NodeJS.ErrnoException).code === 'EFBIG';
}

/** What a failure of the log's file means and what to do, in a sentence or two. */
export function describe(error: unknown, log: string): string {
  const where = clean(log, 300);
  if (error instanceof UserError) return error.message;
  const { code, message } = error as NodeJS.ErrnoException;
  switch (code) {
    case 'ENOSPC':
      return `The disk that holds ${where} is full. Free some space there.`;
    case 'EDQUOT':
      return `The disk quota of the user who writes ${where} is used up. Free some space there, or raise the quota.`;
    case 'EFBIG':
      return `${where} has reached the greatest size that the system allows a file. A new file is begun; state a smaller size for rotation, or raise the limit.`;
    case 'EACCES':
    case 'EPERM':
      return `${where} may not be written by this user. Grant the right, or name another file for the log.`;
    case 'EROFS':
      return `${where} lies on a file system that is mounted read-only, as after a fault of the disk. Mend and remount it, or name another file.`;
    case 'ENOENT':
    case 'ENOTDIR':
    case 'EEXIST':
      return `The folder of ${where} is not there, or a file is in its place. Create or mount it.`;
    case 'EIO':
      return `The disk that holds ${where} reports a fault (EIO). Look at the system's log, and replace the disk.`;
    default:
      return `${where} cannot be written: ${clean(message, 200)}.`;
  }
}

/** The error of opening a log as a user's error. */
export function asUserError(error: unknown, log: string): unknown {
  const { code } = error as NodeJS.ErrnoException;
  return error instanceof UserError || code === undefined ? error : new UserError(describe(error, log));
}
