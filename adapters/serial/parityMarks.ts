import { spawn, type ChildProcess } from 'node:child_process';

const WITHIN = 2000; // ms

/**
 * Asks the line driver to hand on bytes with parity or framing errors as NUL, by `stty -ignpar` on the open port.
 * serialport has them dropped silently, and a number that lost a digit would pass for a reading; a line with a NUL is
 * refused. Done as far as it can be: without stty the port works as serialport left it.
 * @param done told whether it succeeded
 * @returns the child process, to be ended when the port closes; null where it could not be started
 */
export function markParityErrors(descriptor: number, done: (succeeded: boolean) => void): ChildProcess | null {
  if (process.platform !== 'linux') {
    done(false);
    return null;
  }
  const child = spawn('stty', ['-ignpar', '-parmrk'], { stdio: [descriptor, 'ignore', 'ignore'], timeout: WITHIN });
  child.once('error', () => done(false));
  child.once('exit', (status) => done(status === 0));
  return child;
}
