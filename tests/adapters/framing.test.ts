import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { Legibility } from '../../adapters/framing/legibility.js';
import { LineSplitter } from '../../adapters/framing/lineSplitter.js';

interface Found {
  readonly lines: string[];
  readonly refused: string[];
  readonly splitter: LineSplitter;
}

function splitting(maxLine = 64, dropFirst = false): Found {
  const lines: string[] = [];
  const refused: string[] = [];
  const splitter = new LineSplitter(maxLine, {
    line: (bytes, start, end) => lines.push(bytes.toString('utf8', start, end)),
    refused: (fault, bytes, start, end) => refused.push(`${fault} ${bytes.toString('latin1', start, end)}`),
  });
  splitter.reset(dropFirst);
  return { lines, refused, splitter };
}

const push = ({ splitter }: Found, ...chunks: (string | number[])[]): void =>
  chunks.forEach((chunk) => splitter.push(Buffer.from(chunk as string)));

describe('lines', () => {
  it.each([
    ['LF', 'a\nb\n'],
    ['CR', 'a\rb\r'],
    ['CR LF', 'a\r\nb\r\n'],
    ['all in turn, and empty lines', '\na\r\n\n\rb\n\r\r\n'],
  ])('end with %s', (_, text) => {
    const found = splitting();
    push(found, text);
    expect(found.lines).toEqual(['a', 'b']);
  });

  it('wait for their end, and are given up at the end of the stream', () => {
    const found = splitting();
    push(found, '1', '2.', '5');
    expect(found.lines).toEqual([]);
    found.splitter.end();
    expect(found.lines).toEqual(['12.5']);
    found.splitter.end();
    expect(found.lines).toEqual(['12.5']);
  });

  it('are the same however the stream is cut', () => {
    const byte = fc.oneof(fc.constantFrom(10, 13, 0, 0xc2, 0xb0), fc.integer({ min: 0, max: 255 }), fc.integer({ min: 48, max: 57 }));
    fc.assert(
      fc.property(fc.array(byte, { maxLength: 300 }), fc.array(fc.nat(300), { maxLength: 8 }), fc.boolean(), (bytes, cuts, drop) => {
        const whole = splitting(20, drop);
        push(whole, bytes);
        whole.splitter.end();
        const cut = splitting(20, drop);
        let from = 0;
        for (const to of [...cuts, bytes.length].sort((a, b) => a - b)) {
          push(cut, bytes.slice(from, to));
          from = to;
        }
        cut.splitter.end();
        expect([cut.lines, cut.refused]).toEqual([whole.lines, whole.refused]);
      }),
      { seed: 7, numRuns: 2000 },
    );
  });
});

describe('a stream that may begin within a line', () => {
  it.each([
    ['34.5\n12.5\n', ['12.5']],
    ['\n12.5\n', ['12.5']],
    ['34.5\r\n12.5\r\n', ['12.5']],
  ])('drops what comes before the first line end of %j', (text, lines) => {
    const found = splitting(64, true);
    push(found, text);
    expect([found.lines, found.refused]).toEqual([lines, []]);
  });

  it('does not give a torn piece up at its end', () => {
    const found = splitting(64, true);
    push(found, '34.5');
    found.splitter.end();
    expect(found.lines).toEqual([]);
  });

  it('forgets at a reset what was begun before', () => {
    const found = splitting();
    push(found, '12');
    found.splitter.reset(true);
    push(found, '34.5\n7\n');
    expect(found.lines).toEqual(['7']);
  });
});

describe('a line that is too long', () => {
  it('is refused once, as soon as it is too long, and skipped to its end', () => {
    const found = splitting(4);
    push(found, '123456', '7890', '12\n5\n');
    expect([found.lines, found.refused]).toEqual([['5'], ['too-long 1234']]);
  });

  it('is refused likewise within one chunk; one of just the length is not', () => {
    const found = splitting(4);
    push(found, '12345\n1234\n5\n');
    expect([found.lines, found.refused]).toEqual([['1234', '5'], ['too-long 1234']]);
  });

  it('is told also when it is the first of a stream', () => {
    const found = splitting(4, true);
    push(found, '123', '456', '789\n5\n');
    expect([found.lines, found.refused]).toEqual([['5'], ['too-long 1234']]);
  });

  it('takes no memory, however long', () => {
    const found = splitting(256);
    const chunk = Buffer.alloc(65_536, '7');
    const before = process.memoryUsage();
    for (let i = 0; i < 2000; i++) found.splitter.push(chunk);
    const after = process.memoryUsage();
    expect(found.refused).toHaveLength(1);
    expect(after.arrayBuffers - before.arrayBuffers).toBeLessThan(8e6);
  });
});

describe('bytes that are no text', () => {
  it.each([
    ['a NUL', [0x31, 0x00, 0x32]],
    ['a lone continuation byte', [0x31, 0xb0]],
    ['a cut sequence', [0x31, 0xc2]],
    ['an overlong form', [0xc0, 0xb1]],
    ['a surrogate', [0xed, 0xa0, 0x80]],
  ])('refuse their own line alone: %s', (_, bad) => {
    const found = splitting();
    push(found, [0x31, 10, ...bad, 10, 0x32, 10]);
    expect(found.lines).toEqual(['1', '2']);
    expect(found.refused).toHaveLength(1);
    expect(found.refused[0]).toMatch(/^bad-bytes/);
  });

  it('are not seen in a character that two chunks share', () => {
    const found = splitting();
    push(found, [0x32, 0x31, 0xc2], [0xb0, 0x43, 10]);
    expect([found.lines, found.refused]).toEqual([['21°C'], []]);
  });
});

describe('legibility', () => {
  const noise = Buffer.from([0xf8, 0x80, 0x9e, 0xfe, 0x31, 0x06, 0xe6, 0x80]);

  it('is lost once in an episode of mostly unreadable bytes, and comes back once', () => {
    const legible = new Legibility();
    const said: string[] = [];
    const good = (lines: number): void => {
      for (let i = 0; i < lines; i++) if (legible.good(8)) said.push('readable');
    };
    const bad = (lines: number): void => {
      for (let i = 0; i < lines; i++) if (legible.refused(noise, 0, noise.length)) said.push('unread');
    };
    good(100);
    expect(said).toEqual([]);
    bad(100);
    expect(said).toEqual(['unread']);
    good(1000);
    expect(said).toEqual(['unread', 'readable']);
    bad(100);
    expect(said).toEqual(['unread', 'readable', 'unread']);
  });

  it('is not lost by single disturbances', () => {
    const legible = new Legibility();
    for (let i = 0; i < 1000; i++) {
      expect(legible.good(8)).toBe(false);
      if (i % 10 === 0) expect(legible.refused(noise, 0, noise.length)).toBe(false);
    }
  });

  it('is lost also when half of the bytes are good, as for 7E1 read as 8N1', () => {
    // Even parity in the eighth bit: of the digits 1 2 4 7 8 and of the point it is 0 or 1 by their count of ones.
    const even = Buffer.from('12.345\r'.repeat(40)).map((byte) => byte | (ones(byte) % 2) << 7);
    const legible = new Legibility();
    expect(legible.refused(Buffer.from(even), 0, even.length)).toBe(true);
  });
});

function ones(byte: number): number {
  return byte.toString(2).replaceAll('0', '').length;
}
