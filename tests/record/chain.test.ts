import { writeFileSync } from 'node:fs';
import { join } from 'node:path';
import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { hashOf, link, ORIGIN } from '../../src/record/chain.js';
import { verifyChain } from '../../src/record/verifyChain.js';
import { folder } from './folder.js';

/** Lines of a chain, each with its LF, as `count` alarms make them. */
function chain(count: number): string[] {
  let previous = ORIGIN;
  return Array.from({ length: count }, (_, i) => {
    const linked = link({ event: 'raised', channel: 'flöw', index: i, z: i / 3, sentence: 'flow stepped up' }, previous);
    previous = linked.hash;
    return linked.line + '\n';
  });
}

async function verify(bytes: string | Uint8Array): ReturnType<typeof verifyChain> {
  const file = join(folder(), 'a.log');
  writeFileSync(file, bytes);
  return verifyChain([file]);
}

it('SHA-256 of a line: FIPS 180-2, appendix B.1, "abc"', () => {
  expect(hashOf('abc')).toBe('ba7816bf8f01cfea414140de5dae2223b00361a396177a9cb410ff61f20015ad');
});

it('a chain as written holds, and says the hash of its last line', async () => {
  const lines = chain(5);
  expect(await verify(lines.join(''))).toEqual({ holds: true, files: 1, lines: 5, last: hashOf(lines[4]!.trimEnd()), continues: null });
  expect(await verify('')).toEqual({ holds: true, files: 1, lines: 0, last: null, continues: null });
});

describe('tampering is found', () => {
  const lines = chain(6);
  const whole = Buffer.from(lines.join(''));
  const lastLine = whole.length - Buffer.byteLength(lines[5]!);

  it('any other byte in any place: the line or the next does not hold; in the last line it may be the last hash alone that tells', async () => {
    const file = join(folder(), 'a.log');
    writeFileSync(file, whole);
    const untouched = await verifyChain([file]);
    await fc.assert(
      fc.asyncProperty(fc.nat(whole.length - 1), fc.integer({ min: 1, max: 255 }), async (at, change) => {
        const changed = Buffer.from(whole);
        changed[at] = changed[at]! ^ change;
        writeFileSync(file, changed);
        const result = await verifyChain([file]);
        if (at < lastLine) {
          const hit = whole.subarray(0, at).filter((byte) => byte === 10).length + 1;
          expect(result.holds).toBe(false);
          if (!result.holds) expect([hit, hit + 1]).toContain(result.line);
        } else {
          expect(result).not.toEqual(untouched);
        }
      }),
      { seed: 1, numRuns: 1500 },
    );
  });

  it.each([
    ['a line removed', [0, 1, 3, 4, 5], 3],
    ['the first line removed', [1, 2, 3, 4, 5], 1],
    ['two lines exchanged', [0, 1, 3, 2, 4, 5], 3],
    ['a line doubled', [0, 1, 1, 2, 3], 3],
    ['another chain appended', [0, 1, 0, 1], 3],
  ])('%s', async (_, order, line) => {
    expect(await verify(order.map((i) => lines[i]!).join(''))).toMatchObject({ holds: false, line });
  });

  it.each([
    ['a line in another form of the same JSON', lines[0]!.replace('{', '{ '), 'canonical'],
    ['a key given twice', lines[0]!.replace('{', '{"event":"x",'), 'canonical'],
    ['no JSON', 'hello\n', 'no JSON object'],
    ['JSON without a hash', '{"event":"raised"}\n', 'no hash'],
    ['an array', '[]\n', 'no JSON object'],
    ['a line without an end', lines[0]!.trimEnd(), 'torn'],
    ['a line beyond all length', 'x'.repeat(3_000_000) + '\n', 'longer'],
  ])('%s', async (_, text, word) => {
    const result = await verify(text);
    expect(result).toMatchObject({ holds: false, line: 1, sentence: expect.stringContaining(word) as string });
  });
});

it('bytes that are no UTF-8 are found, though they read like the sign for such bytes', async () => {
  const { line } = link({ event: 'raised', sentence: '\ufffd' }, ORIGIN);
  const [before, after] = line.split('\ufffd');
  const result = await verify(Buffer.concat([Buffer.from(before!), Buffer.of(0xff), Buffer.from(after! + '\n')]));
  expect(result).toMatchObject({ holds: false, sentence: expect.stringContaining('canonical') as string });
});

it('hostile bytes never reach the sentence', async () => {
  const result = await verify('\u001b]0;owned\u0007\u001b[2J\u202e' + 'A'.repeat(5000) + '\n');
  expect(result.holds).toBe(false);
  if (result.holds) return;
  expect(result.sentence).not.toMatch(/[\u0000-\u001f\u007f-\u009f\u202e]/);
  expect(result.sentence.length).toBeLessThan(200);
});
