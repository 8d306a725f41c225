import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { rowsOf, wantedChannels, type Rowed } from './recordingRows.js';

const both = wantedChannels('flow', 'inlet');
const CSV = '\ufeff"time",note,flow,inlet\r\n2026-03-01T00:00:00.000Z,"a ""b"",\nc",41.25,20\r\n\r\n2026-03-01T00:00:01Z,,nan,x\n2026-03-01T00:00:02Z,\u00e9\u4e2d,42\nlast,"open,1,2\n2026-03-01T00:00:03Z,,1e-3,7';
const JSONL = '{"time":1,"flow":41.5}\n{"time":2,\n{"time":3,"channel":"inlet","value":20}\n{"time":4,"flow":null,"inlet":7}';

const plain = ({ readings, faults }: Rowed): unknown => [readings, faults];

describe('how a recording is cut into chunks makes no difference', () => {
  it.each([['CSV', CSV], ['JSON Lines', JSONL]])('to %s', (_, text) => {
    const bytes = Buffer.from(text);
    const whole = plain(rowsOf(bytes, both));
    expect(whole).not.toEqual([[], []]);
    const cuts = fc.array(fc.nat(bytes.length), { maxLength: 30 }).map((places) => places.toSorted((a, b) => a - b));
    fc.assert(fc.property(cuts, (places) => {
      expect(plain(rowsOf(bytes, both, places))).toEqual(whole);
    }), { seed: 7, numRuns: 300 });
    expect(plain(rowsOf(bytes, both, Array.from(bytes.keys())))).toEqual(whole); // a byte at a time
  });

  it('a column of numbers comes back as it was written, whatever the form', () => {
    const value = fc.oneof(fc.double({ noNaN: true, noDefaultInfinity: true, max: 1e37, min: -1e37 }), fc.integer());
    const rows = fc.array(fc.tuple(fc.integer({ min: 0, max: 4e12 }), value), { minLength: 1, maxLength: 50 });
    const forms: [string, (rows: readonly (readonly [number, number])[]) => string][] = [
      ['wide CSV', (all) => `flow,time\n${all.map(([time, v]) => `${v},${new Date(time).toISOString()}\n`).join('')}`],
      ['long CSV', (all) => `time,channel,value\n${all.map(([time, v]) => `${new Date(time).toISOString()},flow,${v}\n`).join('')}`],
      ['wide JSON', (all) => all.map(([time, v]) => `${JSON.stringify({ time: new Date(time).toISOString(), flow: v })}\n`).join('')],
      ['long JSON', (all) => all.map(([time, v]) => `${JSON.stringify({ time: new Date(time).toISOString(), channel: 'flow', value: v })}\n`).join('')],
    ];
    fc.assert(
      fc.property(rows, (all) => {
        for (const [form, write] of forms)
          expect(rowsOf(write(all), both).readings, form).toEqual(all.map(([time, v]) => [0, time, v + 0])); // -0 is written as 0
      }),
      { seed: 8, numRuns: 200 },
    );
  });

  it('a torn file gives no reading from its last, unfinished line', () => {
    expect(rowsOf('time,flow\n1,41.25\n2,42.7', both, [], true).readings).toEqual([[0, 1000, 41.25]]);
    expect(rowsOf('time,flow\n1,41.25\n2,42.7', both, [], false).readings).toEqual([[0, 1000, 41.25], [0, 2000, 42.7]]);
  });
});
