import { mkdtempSync, readFileSync, rmSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { spawn, type IPty } from '@lydell/node-pty';
import xterm from '@xterm/headless';
import { afterEach, beforeEach, describe, expect, it } from 'vitest';
import { sleep } from './kilter.js';

const PROGRAM = join(import.meta.dirname, 'programs', 'screenShow.mjs');
/** Modes and states that the screen takes, and what gives each back (xterm control sequences). */
const GIVEN_BACK = ['\x1b[?1049l', '\x1b[?25h', '\x1b[?1000l', '\x1b[?1002l', '\x1b[?1006l', '\x1b[?2004l'];

let folder: string;
let running: IPty | null = null;
beforeEach(() => (folder = mkdtempSync(join(tmpdir(), 'screen-'))));
afterEach(() => {
  try {
    running?.kill('SIGKILL');
  } catch {
    // it has ended by itself
  }
  running = null;
  rmSync(folder, { recursive: true, force: true });
});

interface Session {
  readonly pty: IPty;
  bytes(): string;
  text(): string;
  until(pattern: RegExp): Promise<string>;
  ended(): Promise<number>;
  /** What the program says on standard error. */
  owner(): string;
}

/** @param before done by the shell on the terminal first */
function start(env: Record<string, string> = {}, before = 'true'): Session {
  const screen = new xterm.Terminal({ cols: 80, rows: 24, allowProposedApi: true, scrollback: 0 });
  const said = join(folder, 'stderr');
  // through a shell, so that standard error is a file and the terminal holds the screen alone
  const pty = spawn('/bin/sh', ['-c', `${before}; exec "$0" "$1" 2>"$2"`, process.execPath, PROGRAM, said], {
    name: 'xterm-256color', cols: 80, rows: 24,
    env: { ...process.env, TERM: 'xterm-256color', LANG: 'C.UTF-8', LC_ALL: 'C.UTF-8', NO_COLOR: '', ...env },
  });
  running = pty;
  let bytes = '';
  let status: number | null = null;
  pty.onData((data) => {
    bytes += data;
    screen.write(data);
  });
  pty.onExit(({ exitCode }) => {
    status = exitCode;
  });
  const text = (): string => Array.from({ length: 24 }, (_, y) => screen.buffer.active.getLine(y)?.translateToString(true) ?? '').join('\n');
  const within = async <T>(ask: () => T | null, what: () => string): Promise<T> => {
    const until = performance.now() + 20_000;
    while (performance.now() < until) {
      const answer = ask();
      if (answer !== null) return answer;
      await sleep(20);
    }
    throw new Error(what());
  };
  return {
    pty,
    bytes: () => bytes,
    text,
    until: (pattern) => within(() => (pattern.test(text()) ? text() : null), () => `The screen does not show ${pattern}, but:\n${text()}\n${readFileSync(said, 'utf8')}`),
    ended: () => within(() => status, () => 'The program does not end.'),
    owner: () => readFileSync(said, 'utf8'),
  };
}

/** Waits for it, ten seconds at most; the check that follows says what is amiss. */
async function until(comes: () => boolean): Promise<void> {
  const end = performance.now() + 10_000;
  while (!comes() && performance.now() < end) await sleep(20);
}

const givenBack = (bytes: string): void => {
  for (const sequence of GIVEN_BACK) expect(bytes.lastIndexOf(sequence), JSON.stringify(sequence)).toBeGreaterThan(bytes.lastIndexOf(sequence.replace(/[hl]$/, (end) => (end === 'h' ? 'l' : 'h'))));
};

describe('on a real terminal', () => {
  it('shows the stand, takes keys, follows a resize, quits and lets the program end', async () => {
    const session = start({ SHOW: 'troubled' });
    await session.until(/2 alarms stand on 1 of 6 channels/);
    session.pty.write('n');
    await session.until(/▸■ ALARM high flow/);
    session.pty.write('\x1b');
    await sleep(5);
    session.pty.write('[B');
    await session.until(/▸· normal {5}head-pressure/);
    session.pty.write('?');
    await session.until(/kilter: keys and signs/);
    session.pty.write('x');
    session.pty.resize(80, 20);
    await session.until(/\n.*plc lost.*\n{4}|\n.*plc lost[^\n]*\n*$/);
    session.pty.write('q');
    expect(await session.ended()).toBe(0);
    expect(session.owner()).toBe('owner: quit\n');
    givenBack(session.bytes());
  });

  it('Ctrl-C from the keyboard quits', async () => {
    const session = start();
    await session.until(/all 6 channels are in their bands/);
    session.pty.write('\x03');
    expect(await session.ended()).toBe(0);
    givenBack(session.bytes());
  });
});

it('a terminal that does not know its size, as serial consoles do, is taken to be 80 by 24', async () => {
  const session = start({ COLUMNS: '', LINES: '' }, 'stty cols 0 rows 0');
  await session.until(/all 6 channels are in their bands[^]*2 of 2 sources open/);
  session.pty.write('q');
  expect(await session.ended()).toBe(0);
});

describe('the terminal is given back, and the owner told', () => {
  it.each(['SIGTERM', 'SIGHUP', 'SIGINT', 'SIGQUIT'])('on %s', async (signal) => {
    const session = start();
    await session.until(/all 6 channels are in their bands/);
    session.pty.kill(signal);
    expect(await session.ended()).toBe(0);
    expect(session.owner()).toBe(`owner: ${signal}\n`);
    givenBack(session.bytes());
  });

  it.each(['throw', 'reject'])('when the program fails by a %s', async (fault) => {
    const session = start({ SHOW_FAULT: fault });
    expect(await session.ended()).toBe(3);
    expect(session.owner()).toContain('owner: fatal planted');
    givenBack(session.bytes());
  });

  it('when the terminal goes away, the owner is told and the program ends', async () => {
    const beat = join(folder, 'beat');
    const session = start({ SHOW_BEAT: beat });
    await session.until(/all 6 channels are in their bands/);
    (session.pty as unknown as { destroy(): void }).destroy(); // closes the master: the kernel hangs up
    await until(() => session.owner().includes('owner: SIGHUP'));
    expect(session.owner()).toContain('owner: SIGHUP');
    expect(await session.ended()).toBe(0);
    expect(session.owner()).not.toContain('Assertion failed'); // of Node, which would dump core over a terminal that hung up
  });
});

it('stopped and continued, the screen leaves the terminal and takes it again', async () => {
  const session = start();
  await session.until(/all 6 channels are in their bands/);
  session.pty.kill('SIGTSTP');
  await until(() => session.bytes().includes('\x1b[?1049l'));
  for (const off of GIVEN_BACK) expect(session.bytes()).toContain(off);
  const before = session.bytes().length;
  session.pty.kill('SIGCONT');
  await until(() => session.bytes().slice(before).includes('coolant-out'));
  expect(session.bytes().slice(before)).toContain('\x1b[?1049h');
  session.pty.write('j'); // and keys work again
  await session.until(/▸· normal {5}coolant-in/);
  session.pty.write('q');
  expect(await session.ended()).toBe(0);
});

describe('a terminal that no longer reads', () => {
  const stalled = async (): Promise<{ session: Session; read(): { gap: number; frames: number } }> => {
    const beat = join(folder, 'beat');
    const session = start({ SHOW_BEAT: beat, SHOW: 'many', SHOW_RATE: '50' });
    await session.until(/all 200 channels are in their bands/);
    session.pty.pause();
    await sleep(2500); // far more is drawn in this than the kernel holds for a terminal
    return { session, read: () => JSON.parse(readFileSync(beat, 'utf8')) as { gap: number; frames: number } };
  };

  it('does not hold up the watch: frames are dropped, and go on when it reads again', async () => {
    const { session, read } = await stalled();
    const before = read();
    await sleep(500);
    const after = read();
    expect(after.gap).toBeLessThan(1500); // a blocked write would have lasted as long as the pause
    expect(after.frames).toBeLessThanOrEqual(before.frames + 1);
    session.pty.resume();
    await until(() => read().frames >= after.frames + 5);
    expect(read().frames).toBeGreaterThanOrEqual(after.frames + 5);
    session.pty.write('q');
    expect(await session.ended()).toBe(0);
  });

  it('does not keep a signal from the owner', async () => {
    const { session } = await stalled();
    session.pty.kill('SIGTERM');
    await until(() => session.owner() !== '');
    expect(session.owner()).toBe('owner: SIGTERM\n');
  });
});
