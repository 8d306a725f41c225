import { setTimeout as sleep } from 'node:timers/promises';
import { afterEach, beforeEach, describe, expect, it } from 'vitest';
import { serialSource } from '../../adapters/serial/source.js';
import type { Source } from '../../adapters/source.js';
import { RecordingSink, until } from '../adapters/recordingSink.js';
import { PtyPair } from './ptyPair.js';
import { onPort, wantedNumber } from './serialOptions.js';

let pair: PtyPair;
let sink: RecordingSink;
let source: Source;

beforeEach(() => {
  pair = new PtyPair();
  sink = new RecordingSink();
  source = serialSource('logger', onPort(pair.path), wantedNumber);
});
afterEach(async () => {
  await source.stop();
  await pair.dispose();
});

const opened = (): Promise<void> => until(() => sink.is('open'), 'the port is open');
const lost = (): Promise<void> => until(() => sink.is('lost'), 'the loss was told', 4000); // the plain binding tells it only when asked, after 5 s or more
const came = (value: number): Promise<void> => until(() => sink.values().at(-1) === value, `${value} has come`);

/** Streams `<k>.5` for k from a number on until the line is gone. @returns the first k that was not sent whole */
async function stream(from: number): Promise<number> {
  let k = from;
  try {
    for (; ; k += 50) await pair.send(Array.from({ length: 50 }, (_, i) => `${k + i}.5\n`).join(''));
  } catch {
    return k + 50;
  }
}

describe('a port that is unplugged while it streams', () => {
  it('is opened again under its name, five times over, and no reading is invented, doubled or out of order', async () => {
    source.start(sink);
    let next = 1000;
    for (let plugs = 0; plugs < 5; plugs++) {
      await pair.appear();
      await opened();
      const streaming = stream(next);
      const before = sink.readings.length;
      await until(() => sink.readings.length > before + 500, 'it streams');
      await pair.vanish();
      next = await streaming;
      await lost();
    }
    const values = sink.values();
    expect(values.filter((value) => value < 1000 || value >= next || value % 1 !== 0.5)).toEqual([]);
    expect(values).toEqual([...new Set(values)].toSorted((a, b) => a - b));
    expect(sink.faults.filter(({ fault }) => fault !== 'bad-bytes')).toEqual([]);
  });

  it('takes no processor time while it is away', async () => {
    await pair.appear();
    source.start(sink);
    await opened();
    const streaming = stream(1);
    await until(() => sink.readings.length > 500, 'it streams');
    await pair.vanish();
    await streaming;
    await lost();
    const before = process.cpuUsage();
    await sleep(1000);
    const { user, system } = process.cpuUsage(before);
    expect((user + system) / 1e6).toBeLessThan(0.5); // the fault of the plain binding takes all of it
  });
});

describe('a line that is torn at the unplug', () => {
  it('does not become a reading, nor does it join what comes after', async () => {
    await pair.appear();
    source.start(sink);
    await opened();
    await pair.send('\n1.5\n2.5\n99');
    await came(2.5);
    await pair.vanish();
    await lost();
    await pair.appear();
    await opened();
    await pair.send('.25\n77\n3.5\n');
    await came(3.5);
    expect(sink.values()).toEqual([1.5, 2.5, 77, 3.5]);
  });
});

describe('a port that is not there', () => {
  it('is told once with the way to mend it, and taken when it comes', async () => {
    source.start(sink);
    await until(() => sink.phases.length >= 2, 'its absence was told');
    await sleep(300);
    expect(sink.phases.map(({ phase }) => phase)).toEqual(['connecting', 'connecting']);
    expect(sink.phases[1]?.sentence).toMatch(/^There is no port .*instrument\. (There (is|are) |No serial port was found)/);
    await pair.appear();
    await opened();
    await pair.send('\n4.5\n');
    await came(4.5);
  });
});
