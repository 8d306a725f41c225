import { execFileSync } from 'node:child_process';
import { readFileSync } from 'node:fs';
import { gunzipSync, gzipSync } from 'node:zlib';
import { describe, expect, it } from 'vitest';
import { fileOf, lastWords, readAll, rows } from './recordingFiles.js';

const upTo = (count: number): number[] => Array.from({ length: count }, (_, k) => k);

describe('a gzip recording', () => {
  it('is told by its content, whatever its name', async () => {
    expect((await readAll(fileOf(gzipSync('time,flow\n1,41\n'), 'run.txt'))).values()).toEqual([41]);
    expect((await readAll(fileOf('time,flow\n1,41\n', 'run.csv.gz'))).values()).toEqual([41]);
  });

  it('made by gzip itself gives every reading', async () => {
    const path = fileOf(`time,flow\n${rows(0, 150_000)}`);
    execFileSync('gzip', ['-9', path]);
    expect((await readAll(`${path}.gz`)).values()).toEqual(upTo(150_000));
  });

  it('of several members, as appended logs have them, is read through all (RFC 1952, 2.2)', async () => {
    const members = ['time,fl', `ow\n${rows(0, 10)}`, '', rows(10, 20).slice(0, -3), rows(10, 20).slice(-3), rows(20, 30)];
    const sink = await readAll(fileOf(Buffer.concat(members.map((part) => gzipSync(part)))));
    expect([sink.values(), sink.faults]).toEqual([upTo(30), []]);
  });

  it('that stops in the middle gives what was whole, invents nothing from the torn line, and says so', async () => {
    const whole = gzipSync(`time,flow\n${rows(0, 300_000)}`);
    for (const share of [0.999, 0.5, 0.1]) {
      const path = fileOf(whole.subarray(0, Math.floor(whole.length * share)));
      const sink = await readAll(path);
      // What gzip itself can get out of the file is the measure.
      const possible = execFileSync('sh', ['-c', 'gzip -dc < "$1" 2>/dev/null || true', 'sh', path], { maxBuffer: 1 << 26, encoding: 'utf8' });
      const lines = possible.split('\n').length - 2; // less the header and the torn line
      expect(sink.values()).toEqual(upTo(sink.values().length));
      expect(sink.values().length).toBeGreaterThanOrEqual(lines);
      expect(sink.is('ended')).toBe(true);
      expect(lastWords(sink)).toContain('stops in the middle');
      expect(sink.faults).toEqual([]);
    }
  });

  it('that is damaged gives what came before the damage, and says so', async () => {
    const bytes = gzipSync(`time,flow\n${rows(0, 300_000)}`);
    bytes.fill(0xff, bytes.length >> 1, (bytes.length >> 1) + 64);
    const sink = await readAll(fileOf(bytes));
    expect(lastWords(sink)).toContain('damaged');
    expect(sink.values().length).toBeGreaterThan(100_000);
    const right = upTo(120_000);
    expect(sink.values().slice(0, 120_000)).toEqual(right.slice(0, sink.values().length));
  });

  it('may be followed by padding, which gzip ignores too', async () => {
    const sink = await readAll(fileOf(Buffer.concat([gzipSync(`time,flow\n${rows(0, 10)}`), Buffer.alloc(100_000)])));
    expect([sink.values(), sink.faults, lastWords(sink)]).toEqual([upTo(10), [], expect.stringContaining('to its end')]);
  });

  it('of nothing is empty', async () => {
    expect(lastWords(await readAll(fileOf(gzipSync(''))))).toContain('empty');
  });

  it('that unpacks to a thousand times its size is read in bounded memory', async () => {
    const path = fileOf(gzipSync(`time,flow\n1,41\n${'x'.repeat(60_000_000)}\n2,42\n`));
    expect(gunzipSync(readFileSync(path)).length / readFileSync(path).length).toBeGreaterThan(900);
    const sink = await readAll(path);
    expect([sink.values(), sink.faults.map(({ fault }) => fault)]).toEqual([[41, 42], ['too-long']]);
  });
});
