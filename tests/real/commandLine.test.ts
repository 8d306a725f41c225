import { spawnSync } from 'node:child_process';
import { readFileSync, writeFileSync } from 'node:fs';
import { join } from 'node:path';
import { describe, expect, it } from 'vitest';
import { kilter, MAIN, standIn } from './kilter.js';

async function ran(args: readonly string[]): Promise<{ status: number | string; out: string; err: string }> {
  const running = kilter(args);
  running.child.stdin.end();
  const status = await running.exit;
  return { status, out: running.stdout(), err: running.stderr() };
}

const REPLAYED = `
stand: Replay
watch: {limits: textbook}
sources: {run: {recording: run.csv}}
channels:
  flow: {from: run, unit: L/min, every: 100 ms, band: {centre: 40, sigma: 1}, rules: [one-beyond-3]}
`;

describe('the command line', () => {
  it('tells its verbs and the caution on --help, and its version', async () => {
    const help = await ran(['--help']);
    expect(help.status).toBe(0);
    for (const verb of ['demo', 'watch', 'guard', 'check', 'replay', 'odds', 'verify']) expect(help.out).toMatch(new RegExp(`^  ${verb} `, 'm'));
    expect(help.out).toContain('no safety system');
    const { version } = JSON.parse(readFileSync(join(MAIN, '..', '..', '..', 'package.json'), 'utf8')) as { version: string };
    expect((await ran(['--version'])).out).toBe(`${version}\n`);
  });

  it.each([
    [['chek'], /there is no verb 'chek'\. Did you mean 'check'\?/],
    [['check'], /missing required argument/],
    [['odds', 'beyond', 'three'], /three/],
    [['check', '/nonexistent.yaml'], /There is no file/],
    [['replay', 'x.csv'], /--stand/],
    [['guard', 'a', '--nonsense'], /unknown option/],
    [[], /^$/],
  ])('%j is wrong use: status 2, a sentence, no stack trace', async (args, sentence) => {
    const { status, err } = await ran(args);
    expect(status).toBe(2);
    expect(err).toMatch(sentence);
    expect(err).not.toMatch(/\n\s+at /);
  });

  it('ends quietly when the reader of its output has gone', () => {
    const { folder, stand } = standIn(REPLAYED);
    writeFileSync(join(folder, 'run.csv'), 'time,flow\n' + Array.from({ length: 50_000 }, (_, i) => `${i / 10},40.5\n`).join(''));
    const { stdout, stderr } = spawnSync('sh', ['-c', `"${process.execPath}" "${MAIN}" replay "${join(folder, 'run.csv')}" --stand "${stand}" --json --readings | head -n 1; echo done`], { encoding: 'utf8' });
    expect(stdout.trimEnd().split('\n')).toHaveLength(2);
    expect(stderr).toBe('');
  });

  it('replays to the same bytes on every run, and fails on an alarm where asked to', async () => {
    const { folder, stand } = standIn(REPLAYED);
    const recording = join(folder, 'run.csv');
    writeFileSync(recording, 'time,flow\n' + Array.from({ length: 2000 }, (_, i) => `${1.7e9 + i / 10},${(40 + (i === 900 ? 9 : Math.sin(i * i))).toFixed(2)}\n`).join(''));
    const args = ['replay', recording, '--stand', stand, '--json', '--readings'];
    const [first, second] = [await ran(args), await ran(args)];
    expect(first.out.length).toBeGreaterThan(100_000);
    expect(second.out).toBe(first.out);
    const [one] = first.out.split('\n').map((line) => JSON.parse(line || 'null') as Record<string, unknown> | null);
    expect(one).toEqual({ event: 'reading', channel: 'flow', index: 0, time: '2023-11-14T22:13:20.000Z', value: 40, z: 0, odds: 1, window: { n: 1, mean: 40, sd: null, median: 40, mad: 0, min: 40, max: 40 } });
    expect((await ran([...args, '--fail-on', 'alarm'])).status).toBe(1);
    expect((await ran(['replay', recording, '--stand', stand])).out).toMatch(/flow is above its control limit/);
  });

  it('loads no heavy module for --help', () => {
    // What is loaded decides how fast it starts; the time itself is measured in the bench `start`.
    const { stderr } = spawnSync(process.execPath, [MAIN, '--help'], { encoding: 'utf8', env: { ...process.env, NODE_DEBUG: 'esm,module' }, maxBuffer: 1 << 26 });
    expect(stderr).toContain('verbs.js');
    for (const heavy of ['blessed', 'mqtt', 'serialport', 'aedes', 'zod', 'yaml']) expect(stderr).not.toContain(`node_modules/${heavy}/`);
  });
});
