import xterm from '@xterm/headless';
import { spawn, type IPty } from '@lydell/node-pty';
import { MAIN, sleep } from './kilter.js';

export interface Session {
  readonly pty: IPty;
  /** Rows of the screen as a person sees them. */
  rows(): string[];
  /** All bytes that were sent to the terminal. */
  bytes(): string;
  until(pattern: RegExp, within?: number): Promise<string>;
  readonly exit: Promise<{ exitCode: number; signal?: number | undefined }>;
}

/** The built program on a real pseudo-terminal, its output interpreted as a terminal does. */
export function onTerminal(args: readonly string[], columns: number, height: number, env: Record<string, string> = {}): Session {
  const screen = new xterm.Terminal({ cols: columns, rows: height, allowProposedApi: true, scrollback: 0 });
  let bytes = '';
  const pty = spawn(process.execPath, [MAIN, ...args], {
    name: env['TERM'] ?? 'xterm-256color', // becomes TERM
    cols: columns,
    rows: height,
    env: { ...process.env, TERM: 'xterm-256color', LANG: 'C.UTF-8', LC_ALL: 'C.UTF-8', NO_COLOR: '', ...env },
  });
  pty.onData((data) => {
    bytes += data;
    screen.write(data);
  });
  const rows = (): string[] =>
    Array.from({ length: screen.rows }, (_, y) => screen.buffer.active.getLine(screen.buffer.active.viewportY + y)?.translateToString(true) ?? '');
  return {
    pty,
    rows,
    bytes: () => bytes,
    until: async (pattern, within = 30_000) => {
      const deadline = performance.now() + within;
      for (;;) {
        const text = rows().join('\n');
        if (pattern.test(text)) return text;
        if (performance.now() > deadline) throw new Error(`The screen did not show ${pattern} within ${within} ms, but:\n${text}`);
        await sleep(30);
      }
    },
    exit: new Promise((resolve) => pty.onExit(resolve)),
  };
}
