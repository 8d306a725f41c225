import { closeSync } from 'node:fs';
import { isatty } from 'node:tty';
import type { BlessedScreen } from './blessed.js';

/**
 * While the screen is open, errors of writing to the terminal are its business: a terminal that has gone (EIO, EPIPE) must
 * not throw through the owner, who still has alarms to write.
 * @param onGone called at most once
 * @returns gives the errors back to those who listened before; not after the terminal has gone, for late ones may follow
 */
export function watchTerminal(output: NodeJS.WritableStream, onGone: () => void): () => void {
  const before = output.listeners('error') as ((error: unknown) => void)[];
  let gone = false;
  const absorb = (): void => {
    if (gone) return;
    gone = true;
    onGone();
  };
  output.removeAllListeners('error');
  output.on('error', absorb);
  return () => {
    if (gone) return;
    output.off('error', absorb);
    for (const listener of before) output.on('error', listener);
  };
}

/** Nothing more is written by blessed, which would write its farewell to a terminal that has gone. */
export function mute(screen: BlessedScreen): void {
  screen.program._owrite = screen.program.write = () => true;
}

/**
 * At its end Node gives standard input, output and error the terminal modes back that they began with, and aborts with a core
 * dump where one of them is a terminal that has hung up (`ResetStdio`: an assertion on EIO of tcsetattr). Those that were
 * terminals and are none any more are closed just before, which it passes over. Asked for once in a process.
 */
export function closeDeadTerminalsAtExit(): void {
  if (asked) return;
  asked = true;
  const terminals = [0, 1, 2].filter((fd) => isatty(fd));
  process.once('exit', () => {
    for (const fd of terminals) if (!isatty(fd)) closeQuietly(fd);
  });
}

let asked = false;

function closeQuietly(fd: number): void {
  try {
    closeSync(fd);
  } catch {
    // closed already
  }
}
