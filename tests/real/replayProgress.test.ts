import { spawn } from '@lydell/node-pty';
import { expect, it } from 'vitest';
import { kilter, MAIN, standIn } from './kilter.js';
import { fileOf } from './recordingFiles.js';

const { stand } = standIn('stand: Rig\nwatch: {limits: textbook}\nsources:\n  old: {recording: run.csv}\nchannels:\n  flow: {from: old/flow, every: 1 s, band: {centre: 0, sigma: 1}}\n');
const long = fileOf(`flow\n${'0.25\n-0.5\n0.75\n-0.125\n'.repeat(1_500_000)}`);

/** What a terminal shows of the program, its standard output sent elsewhere. */
async function onTerminal(recording: string): Promise<string> {
  const terminal = spawn('sh', ['-c', 'exec "$0" "$@" > /dev/null', process.execPath, MAIN, 'replay', recording, '--stand', stand], { cols: 80, rows: 24 });
  let shown = '';
  terminal.onData((text) => (shown += text));
  const exitCode = await new Promise<number>((resolve) => terminal.onExit((end) => resolve(end.exitCode)));
  expect(exitCode).toBe(0);
  return shown;
}

it('a long replay shows on a terminal how far it has come', async () => {
  expect(await onTerminal(long)).toMatch(/replay \[=*\.*\] \d+ %/);
});

it('a short one shows nothing', async () => {
  expect(await onTerminal(fileOf('flow\n1\n'))).not.toContain('replay [');
});

it('without a terminal nothing of it is written', async () => {
  const run = kilter(['replay', long, '--stand', stand, '--json']);
  expect(await run.exit).toBe(0);
  expect(run.stderr()).not.toContain('replay [');
});
