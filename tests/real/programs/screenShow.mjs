// Shows an invented stand on the terminal it is given, from the built program, and says on standard error what the owner is told.
// KILTER_DIST: the built program; SHOW_RATE: frames a second; SHOW_FAULT: throw or reject; SHOW: well (as it is left out), troubled, many; SHOW_BEAT: a file given the longest gap between beats.
import { renameSync, writeFileSync } from 'node:fs';
import { dirname, join } from 'node:path';
import { fileURLToPath, pathToFileURL } from 'node:url';

const dist = process.env.KILTER_DIST ?? join(dirname(fileURLToPath(import.meta.url)), '..', '..', '..', 'dist');
const load = (path) => import(pathToFileURL(join(dist, path)).href);
const { openScreen, checkTerminal } = await load('src/screen/shell.js');
const { inventedStand, troubledStand } = await load('tests/screen/inventedStand.js');

checkTerminal(process.env, process.stdin, process.stdout);
const stand = process.env.SHOW === 'troubled' ? troubledStand() : inventedStand({}, process.env.SHOW === 'many' ? 200 : 6);
let frames = 0;
let [beat, gap] = [performance.now(), 0];
const pulse = setInterval(() => {
  const now = performance.now();
  gap = Math.max(gap, now - beat);
  beat = now;
  if (!process.env.SHOW_BEAT) return;
  writeFileSync(`${process.env.SHOW_BEAT}.new`, JSON.stringify({ gap, frames }));
  renameSync(`${process.env.SHOW_BEAT}.new`, process.env.SHOW_BEAT); // whole at any moment
}, 20);
const turn = () => {
  frames++;
  for (const channel of stand.channels) {
    const { trend, trendLength } = channel;
    channel.index++;
    const first = trend[0];
    trend.copyWithin(0, 1, trendLength);
    trend[trendLength - 1] = first;
  }
  return { ...stand, now: stand.now + frames * 100 };
};
const end = (words, status) => {
  clearInterval(pulse);
  process.stderr.write(`owner: ${words}\n`);
  process.exitCode = status;
};
const screen = openScreen({
  env: process.env,
  ...(process.env.SHOW_RATE ? { rate: Number(process.env.SHOW_RATE) } : {}),
  view: turn,
  select: () => undefined,
  onQuit: () => end('quit', 0),
  onSignal: (signal) => end(signal, 0),
  onFatal: (error) => end(`fatal ${error instanceof Error ? error.message : String(error)}`, 3),
});
if (process.env.SHOW_FAULT === 'throw') setTimeout(() => { throw new Error('planted'); }, 300);
if (process.env.SHOW_FAULT === 'reject') setTimeout(() => void Promise.reject(new Error('planted')), 300);
if (process.env.SHOW_MESSAGE) screen.message(process.env.SHOW_MESSAGE);
