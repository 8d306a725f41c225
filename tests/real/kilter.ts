import { spawn, type ChildProcessByStdio } from 'node:child_process';
import { mkdtempSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import type { Readable, Writable } from 'node:stream';

export const MAIN = join(import.meta.dirname, '..', '..', 'dist', 'src', 'main.js');

export interface Running {
  readonly child: ChildProcessByStdio<Writable, Readable, Readable>;
  readonly stdout: () => string;
  readonly stderr: () => string;
  /** Resolves with the exit status, or the signal's name. */
  readonly exit: Promise<number | string>;
  /** Resolves once standard error holds a match. */
  said(pattern: RegExp, within?: number): Promise<RegExpExecArray>;
}

/** Starts the built program as a user would. */
export function kilter(args: readonly string[], env: NodeJS.ProcessEnv = {}): Running {
  const child = spawn(process.execPath, [MAIN, ...args], { stdio: ['pipe', 'pipe', 'pipe'], env: { ...process.env, ...env } });
  let out = '';
  let err = '';
  child.stdout.setEncoding('utf8').on('data', (text: string) => (out += text));
  child.stderr.setEncoding('utf8').on('data', (text: string) => (err += text));
  child.stdin.on('error', () => undefined); // the program may end before it has read all
  const exit = new Promise<number | string>((resolve) => child.once('close', (code, signal) => resolve(code ?? signal ?? 'gone')));
  return {
    child,
    stdout: () => out,
    stderr: () => err,
    exit,
    said: async (pattern, within = 10_000) => {
      const until = performance.now() + within;
      for (;;) {
        const match = pattern.exec(err);
        if (match) return match;
        if (performance.now() > until) throw new Error(`kilter did not say ${pattern} within ${within} ms, but:\n${err}`);
        await new Promise((resolve) => setTimeout(resolve, 10));
      }
    },
  };
}

/** A fresh folder with a stand file in it. */
export function standIn(yaml: string): { folder: string; stand: string; log: string } {
  const folder = mkdtempSync(join(tmpdir(), 'kilter-test-'));
  const stand = join(folder, 'stand.yaml');
  const log = join(folder, 'alarms.jsonl');
  writeFileSync(stand, yaml.replaceAll('LOG', log));
  return { folder, stand, log };
}

export const sleep = (ms: number): Promise<void> => new Promise((resolve) => setTimeout(resolve, ms));
