import { readFileSync } from 'node:fs';
import { gzipSync } from 'node:zlib';
import { describe, expect, it } from 'vitest';
import { kilter, standIn } from './kilter.js';
import { fileOf } from './recordingFiles.js';

const RULES = 'rules: [one-beyond-3, two-of-three-beyond-2, four-of-five-beyond-1, eight-one-side]';
const standOf = (channels: string): string =>
  standIn(`stand: Rig\nwatch: {limits: textbook}\nsources:\n  old: {recording: run.csv}\nchannels:\n${channels}`).stand;
const FLOW = standOf(`  flow: {from: old/flow, every: 1 s, band: {centre: 0, sigma: 1}, ${RULES}}\n`);

interface Line {
  readonly event: string;
  readonly channel: string;
  readonly index: number;
  readonly time: string;
  readonly detector: string;
  readonly value: number | null;
  readonly z: number | null;
  readonly odds: number | null;
  readonly window: Record<string, number | null>;
}

async function replay(recording: string, ...args: readonly string[]): Promise<{ status: number | string; out: string; err: string; lines: Line[] }> {
  const run = kilter(['replay', fileOf(recording), '--stand', FLOW, ...args]);
  const status = await run.exit;
  const out = run.stdout();
  const lines = args.includes('--json') ? out.split('\n').slice(0, -1).map((line) => JSON.parse(line) as Line) : [];
  return { status, out, err: run.stderr(), lines };
}

const column = (values: readonly (number | null)[]): string => `time,flow\n${values.map((value, i) => `${i},${value ?? ''}\n`).join('')}`;

describe('kilter replay --json', () => {
  // tests/reference/rules.json: brute force from the definitions in the Western Electric handbook (1956); indices count readings.
  const { long } = JSON.parse(readFileSync(new URL('../reference/rules.json', import.meta.url), 'utf8')) as {
    long: { z: number[]; signals: Record<string, number[]> }[];
  };

  it('prints exactly the signals of the reference', async () => {
    const { z, signals } = long[0]!;
    const { lines, status } = await replay(column(z.map((thousandths) => thousandths / 1000)), '--json');
    for (const rule of ['one-beyond-3', 'two-of-three-beyond-2', 'four-of-five-beyond-1', 'eight-one-side'])
      expect(lines.filter(({ event, detector }) => event === 'signal' && detector === rule).map(({ index }) => index), rule).toEqual(signals[rule]);
    expect(status).toBe(0);
  });

  it('prints a signal with the fixed keys in their order', async () => {
    const { lines, out } = await replay('time,flow\n2026-03-01T08:15:30.250Z,0.5\n2026-03-01T08:15:31.250Z,-4\n', '--json');
    expect(out.split('\n')[0]).toBe(
      '{"event":"signal","channel":"flow","index":1,"time":"2026-03-01T08:15:31.250Z","detector":"one-beyond-3","side":"low","value":-4,"z":-4}',
    );
    expect(lines.map(({ event }) => event)).toEqual(['signal', 'raised']);
  });

  it('adds a line a reading with --readings: z, its odds, and the window of --window', async () => {
    const { lines } = await replay('time,flow\n1,1\n2,\n3,3\n4,nan\n5,-2\n6,2\n', '--json', '--readings', '--window', '3');
    const readings = lines.filter(({ event }) => event === 'reading');
    expect(readings.map(({ index, value, z }) => [index, value, z])).toEqual([[0, 1, 1], [1, 3, 3], [2, null, null], [3, -2, -2], [4, 2, 2]]);
    expect(Object.keys(readings[0]!)).toEqual(['event', 'channel', 'index', 'time', 'value', 'z', 'odds', 'window']);
    // P(|Z| > 1), > 2, > 3: Abramowitz and Stegun, Handbook of Mathematical Functions, table 26.1 (from memory: 0.3173, 0.0455, 0.0027)
    [0.3173105, 0.0026998, null, 0.0455003, 0.0455003].forEach((odds, i) =>
      odds === null ? expect(readings[i]!.odds).toBeNull() : expect(readings[i]!.odds).toBeCloseTo(odds, 7),
    );
    // 3, -2, 2 by hand: mean 1, squared deviations 4 + 9 + 1 = 14 over 2, median 2, deviations 1, 4, 0
    const { sd, ...rest } = readings[4]!.window;
    expect(rest).toEqual({ n: 3, mean: 1, median: 2, mad: 1, min: -2, max: 3 });
    expect(sd).toBeCloseTo(Math.sqrt(7), 14);
    expect(readings[0]!.window).toMatchObject({ n: 1, sd: null });
  });

  it('stands each signal before the line of its reading', async () => {
    const { lines } = await replay('time,flow\n1,0.1\n2,9\n3,0.2\n', '--json', '--readings');
    expect(lines.map(({ event, index }) => `${event} ${index}`)).toEqual(['reading 0', 'signal 1', 'raised 1', 'reading 1', 'reading 2']);
  });

  it('is the same to the byte on every run, gzip or not', async () => {
    const text = column(long[1]!.z.slice(0, 5000).map((thousandths) => thousandths / 700));
    const plain = await replay(text, '--json', '--readings');
    expect(plain.out.length).toBeGreaterThan(1e6);
    expect((await replay(text, '--json', '--readings')).out).toBe(plain.out);
    const packed = kilter(['replay', fileOf(gzipSync(text)), '--stand', FLOW, '--json', '--readings']);
    await packed.exit;
    expect(packed.stdout()).toBe(plain.out);
  });

  it('ends quietly when its reader goes', async () => {
    const run = kilter(['replay', fileOf(column(Array.from({ length: 300_000 }, (_, i) => i % 3))), '--stand', FLOW, '--json', '--readings']);
    run.child.stdout.once('data', () => run.child.stdout.destroy());
    expect(await run.exit).toBe(0);
    expect(run.stderr()).toBe('');
  });
});

describe('kilter replay', () => {
  it('tells people what it saw: readings, signals, alarms and what was no reading', async () => {
    const { out, status } = await replay('time,flow\n1,0.1\n2,9\n3,x\n4,0.2\n');
    expect(out).toMatch(/3 readings in /);
    expect(out).toMatch(/flow +3 readings +1 alarms/);
    expect(out).toMatch(/signals: one-beyond-3 1/);
    expect(out).toMatch(/1970-01-01T00:00:02\.000Z .*flow/);
    expect(out).toContain('Not read: 1 not-a-number.');
    expect(status).toBe(0);
  });

  it('lists twenty alarms and counts the others', async () => {
    const values = Array.from({ length: 1300 }, (_, i) => (i % 40 === 0 ? 9 : i % 2 ? 0.3 : -0.3));
    const { out } = await replay(column(values));
    expect(out.match(/^1970-\S+ /gm)).toHaveLength(20);
    expect(out).toMatch(/and \d+ more alarms/);
  });

  it('ends with 1 on --fail-on alarm when one was raised, else with 0', async () => {
    expect((await replay('time,flow\n1,0.1\n2,9\n', '--fail-on', 'alarm')).status).toBe(1);
    expect((await replay('time,flow\n1,0.1\n2,9\n', '--json', '--fail-on', 'alarm')).status).toBe(1);
    expect((await replay('time,flow\n1,0.1\n2,1\n', '--fail-on', 'alarm')).status).toBe(0);
    expect((await replay('time,flow\n1,0.1\n2,9\n')).status).toBe(0);
  });

  it.each([
    [['--channel', 'flwo'], /no channel 'flwo'/],
    [['--window', '1'], /window of '1'/],
    [['--window', 'many'], /window of 'many'/],
    [['--fail-on', 'signal'], /'signal'/],
    [['--columns', 'flow'], /--columns does not understand 'flow'/],
    [['--columns', 'x=flwo'], /no channel 'flwo'/],
    [['--columns', 'x=flow'], /x|column/],
  ])('ends with 2 on %j', async (args, sentence) => {
    const { status, err, out } = await replay('time,flow\n1,0.1\n', ...args);
    expect([status, out]).toEqual([2, '']);
    expect(err).toMatch(sentence);
    expect(err).not.toContain('    at ');
  });

  it('ends with 2 where the recording or the stand is not there', async () => {
    for (const args of [['/nowhere/run.csv', '--stand', FLOW], [fileOf('time,flow\n1,1\n'), '--stand', '/nowhere/stand.yaml'], [], [fileOf('time,flow\n1,1\n')]])
      expect(await kilter(['replay', ...args]).exit).toBe(2);
  });

  it('takes the columns named with --columns', async () => {
    const { lines } = await replay('time,flow,Flow [L/min]\n1,0,9\n2,0,9\n', '--json', '--readings', '--columns', 'Flow [L/min]=flow');
    expect(lines.filter(({ event }) => event === 'reading').map(({ value }) => value)).toEqual([9, 9]);
  });

  it('says which channels the recording lacks, and that it has no times', async () => {
    const stand = standOf(`  flow: {from: old/flow, every: 1 s, band: {centre: 0, sigma: 1}}\n  inlet: {from: old/inlet, band: {centre: 0, sigma: 1}}\n`);
    const run = kilter(['replay', fileOf('flow\n1\n2\n'), '--stand', stand, '--json', '--readings']);
    expect(await run.exit).toBe(0);
    expect(run.stderr()).toContain('Not in the recording: inlet.');
    expect(run.stderr()).toContain('has no times');
    expect(run.stdout().split('\n').slice(0, -1).map((line) => (JSON.parse(line) as Line).time)).toEqual(['1970-01-01T00:00:00.000Z', '1970-01-01T00:00:01.000Z']);
  });
});
