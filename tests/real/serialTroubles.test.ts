import { spawnSync } from 'node:child_process';
import { mkdtempSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterEach, beforeEach, describe, expect, it } from 'vitest';
import type { SerialOptions } from '../../adapters/options.js';
import { serialSource } from '../../adapters/serial/source.js';
import { whyNotOpen } from '../../adapters/serial/trouble.js';
import type { Source } from '../../adapters/source.js';
import { clean } from '../../src/text/clean.js';
import { RecordingSink, until } from '../adapters/recordingSink.js';
import { PtyPair } from './ptyPair.js';
import { onPort, wantedNumber } from './serialOptions.js';

let pair: PtyPair;
const sources: Source[] = [];

beforeEach(async () => {
  pair = new PtyPair();
  await pair.appear();
});
afterEach(async () => {
  await Promise.all(sources.splice(0).map((source) => source.stop()));
  await pair.dispose();
});

function open(path: string, more: Partial<SerialOptions> = {}): { sink: RecordingSink; source: Source } {
  const sink = new RecordingSink();
  const source = serialSource('logger', onPort(path, more), wantedNumber);
  sources.push(source);
  source.start(sink);
  return { sink, source };
}
const says = (sink: RecordingSink, pattern: RegExp): Promise<void> =>
  until(() => sink.phases.some(({ sentence }) => pattern.test(sentence)), `it says ${String(pattern)}`);

describe('a second kilter on one port', () => {
  it('says that it is in use, takes nothing from the first, and takes over when the first stops', async () => {
    const first = open(pair.path);
    await until(() => first.sink.is('open'), 'the first has it');
    const second = open(pair.path);
    await says(second.sink, new RegExp(`in use by another program: .*process ${process.pid}`));
    await pair.send('\n1.5\n2.5\n');
    await until(() => first.sink.readings.length === 2, 'the first reads');
    expect(second.sink.readings).toEqual([]);
    await first.source.stop();
    await until(() => second.sink.is('open'), 'the second has it');
    await pair.send('\n3.5\n');
    await until(() => second.sink.readings.length === 1, 'the second reads');
    expect([first.sink.values(), second.sink.values()]).toEqual([[1.5, 2.5], [3.5]]);
  });
});

describe('an attempt at a port in use', () => {
  it('leaves the settings of its line as they are', async () => {
    const first = open(pair.path);
    const flags = (): string => spawnSync('stty', ['-F', pair.path, '-a'], { encoding: 'utf8' }).stdout;
    await until(() => first.sink.is('open') && / -ignpar\b/.test(flags()), 'the first has set up the line');
    const before = flags();
    const second = open(pair.path, { baudRate: 9600, dataBits: 7, parity: 'even' });
    await says(second.sink, /in use/);
    await second.source.stop();
    expect(flags()).toBe(before);
  });
});

describe('a path that is no serial line', () => {
  it.each([
    ['a file', 'recording.csv', /is a file, not a serial line. .*recording:/],
    ['a directory', '.', /is a directory, not a serial line/],
    ['below a file', 'recording.csv/x', /There is no port/],
  ])('is told to be %s', async (_, name, sentence) => {
    const folder = mkdtempSync(join(tmpdir(), 'kilter-no-tty-'));
    writeFileSync(join(folder, 'recording.csv'), 'time,flow\n');
    const { sink } = open(join(folder, name));
    await says(sink, sentence);
    rmSync(folder, { recursive: true });
    expect(sink.phases.map(({ phase }) => phase)).not.toContain('open');
  });

  it('is told to be another device', async () => {
    const { sink } = open('/dev/null');
    await says(sink, /not a serial line/);
  });
});

describe('the sentence for a port that does not open', () => {
  // The texts are serialport's own (bindings-cpp, serialport_unix.cpp); not all of them can be brought about at a test.
  it.each([
    ['Error: Permission denied, cannot open', /may not be read and written by this user\. .*usermod -aG dialout/],
    ['Error Resource temporarily unavailable Cannot lock port', /in use by another program/],
    ['Error: Device or resource busy, cannot open', /in use by another program/],
    ['Error: Inappropriate ioctl for device, cannot open', /not a serial line/],
    ['Error: Invalid argument || while setting custom baud rate of 7', /does not take these settings.*Check baudRate/],
    ['Error: Input/output error, cannot open', /does not answer.*Check the plug/],
    ['Error: something new\u001b[2J', /did not open: .*something new/],
  ])('%s', async (said, sentence) => {
    const why = await whyNotOpen('/dev/null', new Error(said));
    expect(why).toMatch(sentence);
    expect(why).toBe(clean(why, 1000));
  });

  it('is fit for a screen whatever the path', async () => {
    const why = await whyNotOpen('/dev/\u001b[2J\u202ex', new Error('Error: No such file or directory'));
    expect(why).toMatch(/^There is no port/);
    expect(why).toBe(clean(why, 1000));
  });
});

describe('an instrument that sends no line ends', () => {
  it('is told once as too long, takes no memory, and is read as soon as it sends them', async () => {
    const { sink } = open(pair.path);
    await until(() => sink.is('open'), 'it is open');
    await pair.send('\n1.5\n');
    const before = process.memoryUsage().arrayBuffers;
    for (let i = 0; i < 500; i++) await pair.send(Buffer.alloc(4000, '7'));
    expect(process.memoryUsage().arrayBuffers - before).toBeLessThan(16e6);
    await pair.send('\n2.5\n');
    await until(() => sink.readings.length === 2, 'it is read again');
    expect([sink.values(), sink.count('too-long'), sink.faults.length]).toEqual([[1.5, 2.5], 1, 1]);
  });
});

describe('a wrong baud rate', () => {
  it('is told once an episode, with what to check, and its end too', async () => {
    const { sink } = open(pair.path);
    await until(() => sink.is('open'), 'it is open');
    await pair.send('\n1.5\n');
    const noise = Buffer.from([0x80, 0xf8, 0x9e, 0x06, 0xfe, 0x66, 0x80, 0x1e, 0xe6, 0x0a]);
    for (let i = 0; i < 100; i++) await pair.send(noise);
    await says(sink, /cannot be read at 115200 baud 8N1. Check baudRate/);
    for (let i = 0; i < 300; i++) await pair.send('2.5000\n');
    await says(sink, /can be read again/);
    expect([sink.count('unread'), sink.count('bad-bytes')]).toEqual([1, 100]);
    expect(new Set(sink.values())).toEqual(new Set([1.5, 2.5]));
  });
});

describe('a byte with a parity error', () => {
  it('is asked of the driver as a NUL, which refuses its line, and not dropped silently', async () => {
    const { sink } = open(pair.path);
    const flags = (): string => spawnSync('stty', ['-F', pair.path, '-a'], { encoding: 'utf8' }).stdout;
    await until(() => sink.is('open') && / -ignpar\b/.test(flags()), 'the line does not ignore parity errors');
    expect(flags()).toMatch(/ -parmrk\b/);
    await pair.send('\n1.5\n2\0.5\n3.5\n');
    await until(() => sink.readings.length === 2, 'the other lines came');
    expect([sink.values(), sink.count('bad-bytes')]).toEqual([[1.5, 3.5], 1]);
  });
});

describe('stopping', () => {
  it('takes less than a second while the instrument streams, and frees the port', async () => {
    const { sink, source } = open(pair.path);
    await until(() => sink.is('open'), 'it is open');
    const enough = new AbortController();
    const sending = (async () => {
      while (!enough.signal.aborted) await pair.send('1.5\n'.repeat(100));
    })();
    await until(() => sink.readings.length > 1000, 'it streams');
    const start = performance.now();
    await source.stop();
    expect(performance.now() - start).toBeLessThan(1000);
    sink.close();
    const next = open(pair.path);
    await until(() => next.sink.readings.length > 100, 'another reads it');
    enough.abort();
    await sending;
    expect(sink.late).toEqual([]);
  });
});
