import { spawn, type ChildProcess } from 'node:child_process';

const WITHIN = 2000; // ms

/**
 * Asks the line driver to hand on bytes with parity or framing errors as NUL, by `stty -ignpar` while the port is open.
 * serialport has them dropped silently, and a number that lost a digit would pass for a reading; a line with a NUL is
 * refused. Done as far as it can be: without stty the port works as serialport left it.
 * The device is named, not handed over as standard input: a child's standard input is made blocking, which is a property
 * that it would share with the open port.
 * @param done told whether it succeeded
 * @returns the child process, to be ended when the port closes; null where it could not be started
 */
export function markParityErrors(path: string, done: (succeeded: boolean) => void): ChildProcess | null {
  if (process.platform !== 'linux') {
    done(false);
    return null;
  }
  const child = spawn('stty', ['-F', path, '-ignpar', '-parmrk'], { stdio: 'ignore', timeout: WITHIN });
  child.once('error', () => done(false));
  child.once('exit', (status) => done(status === 0));
  return child;
}
