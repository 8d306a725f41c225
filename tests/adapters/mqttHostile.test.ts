import { describe, expect, it } from 'vitest';
import { Intake } from '../../adapters/mqtt/intake.js';
import type { Sink } from '../../adapters/source.js';
import { wantedOn } from './mqttOptions.js';
import { RecordingSink } from './recordingSink.js';

/** xorshift32 (Marsaglia, Journal of Statistical Software 8(14), 2003), seeded: the same hostile messages every time. */
function random(seed: number): (below: number) => number {
  let x = seed;
  return (below) => {
    x ^= x << 13;
    x ^= x >>> 17;
    x ^= x << 5;
    return (x >>> 0) % below;
  };
}

const PARTS = ['', '1', '-', '.', 'e9', '"', '{', '}', '[', ']', ':', ',', '"v"', '"t"', '"n"', 'null', 'true', '\\u0000', '\u0000', '\u001b[2J', '\u202e', '{bold}', '$(reboot)', '999999999999999999999999', '1e999', '__proto__', 'constructor'];

describe('a hundred thousand hostile messages', () => {
  it('give a reading only where the whole payload is one, never a throw', () => {
    const next = random(4711);
    let text = '';
    const taken = [0, 0, 0, 0];
    let refused = 0;
    const judged = (slot: number, _time: number, value: number): void => {
      taken[slot]!++;
      judge(slot, value, text);
    };
    const sink: Sink = Object.assign(new RecordingSink(), { reading: judged, stale: judged, fault: () => refused++ });
    const intake = new Intake(
      [
        wantedOn('cell/+', { slot: 0 }),
        wantedOn('cell/flow', { slot: 1, value: '/v', time: '/t', sequence: '/n' }),
        wantedOn('#', { slot: 2, value: '/__proto__/constructor' }),
        wantedOn('cell/flow', { slot: 3, value: '' }),
      ],
      200,
    );
    const topics = ['cell/flow', 'cell/', 'cell', '', '/', 'cell/flow/x', 'cell/\u0000', 'cell/\ufffd', '$SYS/x', '__proto__', 'constructor'];
    for (let i = 0; i < 100_000; i++) {
      let payload =
        next(3) === 0
          ? Buffer.from(Array.from({ length: next(24) }, () => next(256)))
          : Buffer.from(Array.from({ length: next(9) }, () => PARTS[next(PARTS.length)]!).join(''));
      if (next(500) === 0) payload = Buffer.concat(Array<Buffer>(60).fill(payload));
      text = payload.toString('latin1');
      const topic = next(4) === 0 ? topics[next(topics.length)]! : 'cell/flow';
      intake.take(topic, payload, { retain: next(10) === 0, dup: next(10) === 0 }, sink);
    }
    expect(refused).toBeGreaterThan(100_000); // most are refused by several channels
    expect(taken[2]).toBe(0); // prototypes are out of reach
    expect(Math.min(taken[0]!, taken[3]!)).toBeGreaterThan(100); // and some are numbers
  });
});

/** By another way: JavaScript's own readers. */
function judge(slot: number, value: number, text: string): void {
  if (slot === 0) {
    expect(text).toMatch(/^[ \t]*[+-]?(\d+\.?\d*|\.\d+)(e[+-]?\d+)?[ \t]*$/i);
    expect(value).toBe(Math.abs(Number(text)) >= 9.9e37 ? Math.sign(Number(text)) * Infinity : Number(text));
  } else {
    const document: unknown = JSON.parse(text);
    const found = slot === 3 ? document : (document as { v: unknown }).v;
    expect(['number', 'string']).toContain(typeof found);
  }
}
