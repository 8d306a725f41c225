import { connect } from 'node:net';
import { once } from 'node:events';
import { setTimeout as sleep } from 'node:timers/promises';
import mqtt from 'mqtt';
import { afterEach, describe, expect, it } from 'vitest';
import { instrumentAt, readingAt } from '../../adapters/simulated/cell.js';
import { DEMO_CHANNELS } from '../../adapters/simulated/demoChannels.js';
import { startDemoRig, type DemoRig } from '../../adapters/simulated/demoRig.js';
import { until } from '../adapters/recordingSink.js';

let rig: DemoRig | null = null;
afterEach(async () => {
  await rig?.stop();
  rig = null;
});

/** Whether `part` stands in `whole` without a gap. */
function isStretch(part: readonly number[], whole: readonly (number | null)[]): boolean {
  const text = (values: readonly (number | null)[]): string => `,${values.join(',')},`;
  return text(whole).includes(text(part));
}

const cellOf = (channel: string): (number | null)[] => Array.from({ length: 200 }, (_, step) => readingAt(7, instrumentAt(channel), step, true));

describe('the demo rig', () => {
  it('publishes what the cell shows, as numbers and as JSON, over a broker that only this machine reaches', async () => {
    rig = await startDemoRig({ seed: 7 });
    expect(rig.url).toMatch(/^mqtt:\/\/127\.0\.0\.1:\d+$/);
    const client = await mqtt.connectAsync(rig.url);
    const got = new Map<string, number[]>();
    client.on('message', (topic, payload) => {
      const text = payload.toString();
      const value = text.startsWith('{') ? (JSON.parse(text) as { value: number }).value : Number(text);
      got.set(topic, [...(got.get(topic) ?? []), value]);
    });
    await client.subscribeAsync('#');
    await until(() => got.size === 3 && [...got.values()].every((values) => values.length >= 12), 'twelve readings of each have come');
    await client.endAsync(true);
    for (const { channel, topic } of DEMO_CHANNELS.filter(({ over }) => over === 'mqtt')) expect(isStretch(got.get(topic!)!, cellOf(channel)), channel).toBe(true);
  });

  it('writes lines of csv in the order of its columns', async () => {
    rig = await startDemoRig({ seed: 7 });
    expect(rig.columns).toEqual(DEMO_CHANNELS.filter(({ over }) => over === 'lines').map(({ field }) => field));
    let text = '';
    rig.lineStream.on('data', (chunk: Buffer) => (text += chunk.toString()));
    await until(() => text.split('\n').length > 12, 'twelve lines have come');
    const rows = text.split('\n').slice(0, -1).map((line) => line.split(',').map(Number));
    for (const [i, column] of rig.columns.entries())
      expect(isStretch(rows.map((row) => row[i]!), cellOf(column)), column).toBe(true);
  });

  it('keeps ten steps a second', async () => {
    rig = await startDemoRig({ seed: 7 });
    let lines = 0;
    rig.lineStream.on('data', (chunk: Buffer) => (lines += chunk.toString().split('\n').length - 1));
    const began = performance.now();
    await sleep(2000);
    const due = (performance.now() - began) / 100;
    expect(Math.abs(lines - due)).toBeLessThanOrEqual(4);
  });

  it('says that nothing is wrong while the channels settle', async () => {
    rig = await startDemoRig({ seed: 7 });
    expect(rig.faultNow()).toBeNull();
  });

  it('may be stopped twice, with a client still there, and then nobody answers', async () => {
    const started = await startDemoRig({ seed: 7 });
    const client = await mqtt.connectAsync(started.url, { reconnectPeriod: 0 });
    await Promise.all([started.stop(), started.stop()]);
    await client.endAsync(true);
    const socket = connect(Number(new URL(started.url).port), '127.0.0.1');
    const [error] = (await once(socket, 'error')) as [NodeJS.ErrnoException];
    expect(error.code).toBe('ECONNREFUSED');
  });
});
