import { constants } from 'node:fs';
import { access, readdir, stat } from 'node:fs/promises';
import { SerialPort } from 'serialport';
import { clean } from '../../src/text/clean.js';
import type { Holder } from './lock.js';

const BY_ID = '/dev/serial/by-id';
const LIST_WITHIN = 2000; // ms; listing asks udevadm, which may be slow or absent
const NAMED = 6; // ports named in a sentence

/**
 * Says in a sentence or two why a serial port did not open, and how to mend it: no such port and which there are, no
 * permission, in use, no serial line, a setting it does not know. Never rejects.
 * @param error what opening it said; serialport's errors have no codes, so their text is matched
 */
export async function whyNotOpen(path: string, error: Error): Promise<string> {
  const port = clean(path, 120);
  const said = error.message;
  const found = await stat(path).catch((failure: unknown) => failure as NodeJS.ErrnoException);
  if ('code' in found && (found.code === 'ENOENT' || found.code === 'ENOTDIR')) return `There is no port ${port}. ${await whichPorts()}`;
  if ('isCharacterDevice' in found && !found.isCharacterDevice())
    return `${port} is ${found.isDirectory() ? 'a directory' : 'a file'}, not a serial line. For a file of readings write \`recording:\` in place of \`serial:\`.`;
  if (/permission denied/i.test(said) || (await isBarred(path)))
    return `${port} may not be read and written by this user. Add the user to the group that owns it, as a rule with \`sudo usermod -aG dialout $USER\`, and log in again.`;
  if (/lock|busy|temporarily unavailable/i.test(said)) return whoHasIt(port, null);
  if (/inappropriate ioctl|not a tty/i.test(said)) return `${port} is a device, but not a serial line.`;
  if (/baud/i.test(said)) return `${port} does not take these settings: ${clean(said, 120)}. Check baudRate.`;
  if (/input\/output|no such device/i.test(said)) return `${port} is there but does not answer: ${clean(said, 120)}. Check the plug and the cable.`;
  return `${port} did not open: ${clean(said, 160)}.`;
}

/** Says that another program holds the port, and which as far as it is known. */
export function whoHasIt(port: string, holder: Holder | null): string {
  if (holder === null || holder.pid <= 0) return `${port} is in use by another program. Close that one, or find it with \`fuser -v ${port}\`.`;
  const who = holder.name === null ? `process ${holder.pid}` : `${holder.name} (process ${holder.pid})`;
  return `${port} is in use by another program: ${who}. Close that one first.`;
}

async function isBarred(path: string): Promise<boolean> {
  return access(path, constants.R_OK | constants.W_OK).then(
    () => false,
    (error: unknown) => (error as NodeJS.ErrnoException).code === 'EACCES',
  );
}

/** Which serial ports there are, with the names that last first, as a sentence. */
async function whichPorts(): Promise<string> {
  const lasting = (await readdir(BY_ID).catch(() => [])).map((name) => `${BY_ID}/${name}`);
  const ports = lasting.length > 0 ? lasting : await listed();
  if (ports.length === 0) return 'No serial port was found on this machine: check the plug and the cable.';
  const names = ports.slice(0, NAMED).map((name) => clean(name, 120));
  const more = ports.length > NAMED ? ` and ${ports.length - NAMED} more` : '';
  return `There ${ports.length === 1 ? 'is' : 'are'} ${names.join(', ')}${more}.`;
}

async function listed(): Promise<string[]> {
  const late = new Promise<string[]>((resolve) => setTimeout(resolve, LIST_WITHIN, []).unref());
  const ports = SerialPort.list().then((list) => list.map(({ path }) => path));
  return Promise.race([ports.catch(() => []), late]);
}
