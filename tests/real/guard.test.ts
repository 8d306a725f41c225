import { readFileSync, statSync } from 'node:fs';
import { describe, expect, it } from 'vitest';
import { kilter, sleep, standIn, type Running } from './kilter.js';

const STAND = `
stand: Bench supply
watch: {limits: textbook}
log: {file: LOG, maxSize: 1 GB}
sources:
  pipe: {stdin: true, lines: csv, columns: [a, b]}
channels:
  a: {from: pipe/a, unit: V, band: {centre: 12, sigma: 0.1}, rules: [one-beyond-3], clearAfter: 2, frozen: false}
  b: {from: pipe/b, unit: A, band: {centre: 3, sigma: 0.1}, rules: [one-beyond-3], clearAfter: 2, frozen: false}
`;

interface Line {
  event: string;
  alarm?: string;
  channel?: string;
  detector?: string;
}
const logLines = (file: string): Line[] =>
  readFileSync(file, 'utf8')
    .split('\n')
    .filter((line) => line !== '')
    .map((line) => JSON.parse(line) as Line);

/** Identifiers of the alarms that the program log has shown in whole lines. */
function shownAlarms(stderr: string): string[] {
  return stderr
    .split('\n')
    .slice(0, -1)
    .map((line) => JSON.parse(line) as Line)
    .filter(({ event }) => event === 'raised')
    .map(({ alarm }) => alarm!);
}

async function ready(running: Running): Promise<void> {
  await running.said(/"phase":"open"/);
}

describe('guard', () => {
  it('writes an alarm to the log, says it, and ends with status 0 within a second of TERM', async () => {
    const { stand, log } = standIn(STAND);
    const guard = kilter(['guard', stand]);
    await ready(guard);
    guard.child.stdin.write('12.0,3.0\n12.6,3.0\n');
    await guard.said(/"event":"raised"/);
    const asked = performance.now();
    guard.child.kill('SIGTERM');
    expect(await guard.exit).toBe(0);
    expect(performance.now() - asked).toBeLessThan(1000); // the promise itself, not a measure of speed
    expect(logLines(log).map(({ event, channel, detector }) => [event, channel, detector])).toEqual([
      ['opened', undefined, undefined],
      ['raised', 'a', 'one-beyond-3'],
      ['closed', undefined, undefined],
    ]);
    expect(statSync(log).mode & 0o777).toBe(0o640);
    expect(guard.stdout()).toBe('');
    expect(guard.stderr()).toContain('no safety system');
  });

  it('ends by itself with status 0 when every source has ended', async () => {
    const { stand, log } = standIn(STAND);
    const guard = kilter(['guard', stand]);
    guard.child.stdin.end('12.0,3.0\n11.0,3.0\n12.0,3.0\n12.0,3.0\n');
    expect(await guard.exit).toBe(0);
    expect(logLines(log).map(({ event }) => event)).toEqual(['opened', 'raised', 'cleared', 'closed']);
  });

  it('begins a new log file on HUP, and the chain goes on', async () => {
    const { stand, log, folder } = standIn(STAND);
    const guard = kilter(['guard', stand]);
    await ready(guard);
    guard.child.stdin.write('12.6,3.0\n');
    await guard.said(/"event":"raised"/);
    guard.child.kill('SIGHUP');
    await sleep(300);
    guard.child.stdin.write('12,3\n12,3\n12,3.7\n');
    await guard.said(/"channel":"b"/);
    guard.child.kill('SIGTERM');
    expect(await guard.exit).toBe(0);
    expect(logLines(log).map(({ event }) => event)).toEqual(['continued', 'cleared', 'raised', 'closed']);
    const verify = kilter(['verify', folder + '/alarms.jsonl', '--json']);
    expect(await verify.exit).toBe(0);
  });

  it('refuses a stand whose limits are to come from a budget, in a sentence, with status 2', async () => {
    const { stand } = standIn(STAND.replace('textbook', 'budget').replace('{limits: budget}', '{limits: budget, falseAlarms: 1 per day}'));
    const guard = kilter(['guard', stand]);
    expect(await guard.exit).toBe(2);
    expect(guard.stderr()).toMatch(/textbook/);
    expect(guard.stderr()).not.toMatch(/at .*\.js:/);
  });

  it('killed with -9 at fifty random moments: the log is whole and no alarm that was shown is missing', async () => {
    const { stand, log } = standIn(STAND);
    let random = 20_261_201;
    const next = (): number => (random = (random * 1103515245 + 12345) % 2147483648) / 2147483648;
    let shown = 0;
    for (let round = 0; round < 50; round++) {
      const guard = kilter(['guard', stand]);
      await ready(guard);
      const feeding = setInterval(() => guard.child.stdin.write('12.6,3.0\n12,3\n12,3\n12,3.6\n12,3\n12,3\n'), 2);
      await sleep(next() * 200);
      guard.child.kill('SIGKILL');
      clearInterval(feeding);
      expect(await guard.exit).toBe('SIGKILL');
      const alarms = shownAlarms(guard.stderr());
      const logged = new Set(readFileSync(log, 'utf8').split('\n').slice(0, -1).map((line) => (JSON.parse(line) as Line).alarm));
      for (const alarm of alarms) expect(logged).toContain(alarm);
      shown += alarms.length;
    }
    expect(shown).toBeGreaterThan(200);
    const verify = kilter(['verify', log, '--json']);
    const status = await verify.exit;
    expect({ status, said: verify.stdout() }).toMatchObject({ status: 0 });
  });
});
