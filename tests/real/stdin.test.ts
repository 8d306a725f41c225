import { spawn, type ChildProcess } from 'node:child_process';
import type { Readable } from 'node:stream';
import { setTimeout as sleep } from 'node:timers/promises';
import { afterEach, describe, expect, it } from 'vitest';
import type { Source } from '../../adapters/source.js';
import { stdinSource } from '../../adapters/stdin/source.js';
import { RecordingSink, until } from '../adapters/recordingSink.js';
import { wantedNumber } from './serialOptions.js';

let child: ChildProcess | null = null;

/** What a shell command prints, through a real pipe. */
function piped(command: string): Readable {
  child = spawn('sh', ['-c', command], { stdio: ['ignore', 'pipe', 'ignore'] });
  return child.stdout!;
}
const lines = (stream: Readable, maxLine = 256): Source =>
  stdinSource('pipe', { lines: 'number', columns: null, maxLine }, wantedNumber, stream);

afterEach(() => child?.kill('SIGKILL'));

describe('standard input', () => {
  it('keeps the first line, and a last one without an end', async () => {
    const sink = new RecordingSink();
    const source = lines(piped(String.raw`printf '1.5\r\n2.5\n\n3.5'`));
    source.start(sink);
    await source.ended;
    expect([sink.values(), sink.faults, sink.phases.map(({ phase }) => phase)]).toEqual([[1.5, 2.5, 3.5], [], ['open', 'ended']]);
  });

  it('loses nothing of a long stream, and ends after it', async () => {
    const sink = new RecordingSink(true);
    const source = lines(piped('seq 1 200000'));
    source.start(sink);
    await source.ended;
    expect(sink.readings).toHaveLength(200_000);
    expect(sink.values()).toEqual(Array.from({ length: 200_000 }, (_, i) => i + 1));
  });

  it('is not read while the sink holds it back', async () => {
    let release: () => void = () => undefined;
    const held = new Promise<void>((resolve) => (release = resolve));
    const sink = new RecordingSink();
    sink.pressure = () => held;
    const stream = piped('seq 1 500000');
    const source = lines(stream);
    source.start(sink);
    await until(() => sink.readings.length > 0, 'the first chunk came');
    const first = sink.readings.length;
    await sleep(300);
    expect(sink.readings.length).toBe(first); // one chunk of a pipe
    expect(first).toBeLessThan(50_000);
    expect(stream.readableLength).toBeLessThan(1e6);
    sink.pressure = () => null;
    release();
    await source.ended;
    expect(sink.readings).toHaveLength(500_000);
  });

  it('goes on after a line that is too long', async () => {
    const sink = new RecordingSink();
    const source = lines(piped(String.raw`printf '1.5\n'; head -c 3000000 /dev/zero | tr '\0' 7; printf '\n2.5\n'`), 64);
    source.start(sink);
    await source.ended;
    expect([sink.values(), sink.count('too-long'), sink.faults.length]).toEqual([[1.5, 2.5], 1, 1]);
  });

  it('that was closed before its end gives no torn reading', async () => {
    const sink = new RecordingSink();
    const stream = piped(String.raw`printf '1.5\n2.'; sleep 30`);
    const source = lines(stream);
    source.start(sink);
    await until(() => sink.readings.length === 1, 'the first line came');
    stream.destroy();
    await source.ended;
    expect([sink.values(), sink.phases.at(-1)?.phase]).toEqual([[1.5], 'ended']);
  });

  it('that has ended before the start is told to have ended', async () => {
    const stream = piped('true');
    stream.resume();
    await until(() => stream.readableEnded, 'the stream has ended');
    const sink = new RecordingSink();
    const source = lines(stream);
    source.start(sink);
    await source.ended;
    expect(sink.is('ended')).toBe(true);
  });
});
