import { constants as files, closeSync, openSync, writeSync } from 'node:fs';
import type { BlessedScreen } from './blessed.js';
import { closeDeadTerminalsAtExit, mute, watchTerminal } from './terminalGone.js';

/** Off: mouse, focus and paste modes, keypad; attributes, character set, scrolling region; cursor shown; main screen. Each does no harm where it was off. */
export const RESET =
  '\x1b[?1000l\x1b[?1002l\x1b[?1003l\x1b[?1006l\x1b[?1004l\x1b[?2004l\x1b[?1l\x1b>\x1b(B\x1b[m\x1b7\x1b[r\x1b8\x1b[?25h\x1b[?1049l\x1b[?25h';

export interface Restorer {
  restore(): void;
  /** Signals and faults no longer concern the screen. */
  release(): void;
}

/**
 * Leaves the terminal as it was, whatever ends the screen: quit, a signal, an exception, a rejection; and leaves and takes
 * it again around a stop (TSTP, CONT).
 * @param onSignal the terminal is already restored; the owner ends its work
 */
export function restoreOnEnd(
  screen: BlessedScreen,
  output: NodeJS.WritableStream,
  onSignal: (signal: NodeJS.Signals) => void,
  onFatal: (error: unknown) => void,
): Restorer {
  closeDeadTerminalsAtExit();
  let done = false;
  const restore = (): void => {
    if (done) return;
    done = true;
    try {
      screen.destroy();
    } catch {
      // a screen that is half built must not keep us from the reset below
    }
    if (output === process.stdout) writeReset();
    else output.write(RESET);
    try {
      raw(false);
    } catch {
      // the terminal has gone
    }
  };
  const gone = (): void => {
    mute(screen);
    errorsTaken = null; // they stay ours: some may still come
  };
  let errorsTaken: (() => void) | null = watchTerminal(output, () => {
    gone();
    restore();
    onSignal('SIGHUP');
  });
  const fatal = (error: unknown): void => {
    restore();
    onFatal(error);
  };
  const handlers = new Map<NodeJS.Signals, () => void>();
  for (const signal of ['SIGINT', 'SIGTERM', 'SIGHUP', 'SIGQUIT'] as const)
    handlers.set(signal, () => {
      if (signal === 'SIGHUP') gone();
      restore();
      onSignal(signal);
    });
  handlers.set('SIGTSTP', () => {
    screen.leave();
    output.write(RESET);
    raw(false);
    process.stdin.pause();
    process.kill(process.pid, 'SIGSTOP'); // a handler for TSTP takes the stop away: it is done here
  });
  handlers.set('SIGCONT', () => {
    if (done) return;
    raw(true);
    process.stdin.resume();
    screen.enter();
    screen.alloc(true); // forget what was drawn: the shell has written over it
    screen.program.enableMouse();
    screen.render();
  });
  for (const [signal, handler] of handlers) process.on(signal, handler);
  process.on('exit', restore);
  process.on('uncaughtException', fatal);
  return {
    restore,
    release: () => {
      errorsTaken?.();
      for (const [signal, handler] of handlers) process.off(signal, handler);
      process.off('exit', restore);
      process.off('uncaughtException', fatal);
    },
  };
}

/** Raw mode of the terminal; nothing where standard input is none. */
function raw(on: boolean): void {
  if (process.stdin.isTTY) process.stdin.setRawMode(on);
}

/** By a descriptor of its own which does not block: a terminal that no longer reads must not hold up the end. */
function writeReset(): void {
  let fd = 1;
  try {
    fd = openSync('/dev/tty', files.O_WRONLY | files.O_NOCTTY | files.O_NONBLOCK);
  } catch {
    if (!process.stdout.isTTY) return; // no terminal of ours
  }
  try {
    writeSync(fd, RESET);
  } catch {
    // the terminal has gone, or reads no more
  }
  if (fd !== 1) closeSync(fd);
}
