import { mkdtempSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { setTimeout as sleep } from 'node:timers/promises';
import { describe, expect, it } from 'vitest';
import { recordingBytes } from '../../adapters/recording/bytes.js';
import { recordingSource } from '../../adapters/recording/source.js';
import { UserError } from '../../src/text/errors.js';
import { wantedChannels } from '../adapters/recordingRows.js';
import { RecordingSink, until } from '../adapters/recordingSink.js';
import { fileOf, lastWords, readAll, rows } from './recordingFiles.js';

const folder = mkdtempSync(join(tmpdir(), 'kilter-recording-'));

describe('a recording that cannot be read', () => {
  it.each([
    ['is not there', join(folder, 'none.csv'), /There is no recording .*none\.csv/],
    ['is a folder', folder, /is a folder/],
    ['has a file for a folder', join(fileOf('x'), 'run.csv'), /cannot be read \(ENOTDIR\)/],
    ['is empty', fileOf(''), /is empty/],
    ['is UTF-16', fileOf(Buffer.from('\ufefftime,flow\n1,41\n', 'utf16le')), /UTF-16.*UTF-8/],
    ['is UTF-16, high byte first', fileOf(Buffer.from([0xfe, 0xff, 0, 0x74])), /UTF-16.*UTF-8/],
  ])('since it %s is a user error, and as a source ends with the same sentence', async (_, path, sentence) => {
    await expect(recordingBytes(path)).rejects.toThrow(UserError);
    await expect(recordingBytes(path)).rejects.toThrow(sentence);
    const sink = await readAll(path);
    expect(sink.is('ended')).toBe(true);
    expect(lastWords(sink)).toMatch(sentence);
  });

  it('since no column is a channel ends with the columns that there are', async () => {
    expect(lastWords(await readAll(fileOf('time,flwo\n1,2\n')))).toMatch(/flwo.*Is 'flwo' the channel flow\?/);
  });
});

describe('a recording as a source', () => {
  it('leaves the event loop free for others', async () => {
    const path = fileOf(`time,flow\n${rows(0, 400_000)}`);
    let longest = 0;
    let last = performance.now();
    let turns = 0;
    const timer = setInterval(() => {
      longest = Math.max(longest, performance.now() - last);
      last = performance.now();
      turns++;
    }, 1);
    const sink = await readAll(path);
    clearInterval(timer);
    expect(sink.readings).toHaveLength(400_000);
    expect(turns).toBeGreaterThan(20); // it took turns: 6 MB in slices of 64 KiB
    expect(longest).toBeLessThan(5000);
  });

  it('is not read on while the sink holds it back, and stops at once even then', async () => {
    const sink = new RecordingSink();
    sink.pressure = () => new Promise<void>(() => undefined);
    const source = recordingSource('old', { path: fileOf(`time,flow\n${rows(0, 400_000)}`) }, wantedChannels('flow'));
    source.start(sink);
    await until(() => sink.readings.length > 0, 'the first slice came');
    const first = sink.readings.length;
    await sleep(100);
    expect(sink.readings.length).toBe(first);
    expect(first).toBeLessThan(10_000);
    await source.stop();
    expect(sink.is('stopped')).toBe(true);
  });

  it('tells how far it has come, rising to 1', async () => {
    const told: number[] = [];
    const sink = new RecordingSink();
    sink.progress = (fraction?: number) => void told.push(fraction ?? NaN);
    const source = recordingSource('old', { path: fileOf(`time,flow\n${rows(0, 400_000)}`) }, wantedChannels('flow'));
    source.start(sink);
    await source.ended;
    expect(told.length).toBeGreaterThan(2);
    expect(told).toEqual(told.toSorted((a, b) => a - b));
    expect(told.at(-1)).toBe(1);
  });
});
