import { writeFileSync } from 'node:fs';
import { join } from 'node:path';
import fc from 'fast-check';
import { expect, it } from 'vitest';
import { lines } from '../../src/record/lines.js';
import { readLog } from '../../src/record/readLog.js';
import { link, ORIGIN } from '../../src/record/chain.js';
import { folder } from './folder.js';

async function read(bytes: Uint8Array | string, longest?: number): Promise<[string, string, number][]> {
  const file = join(folder(), 'a');
  writeFileSync(file, bytes);
  const all: [string, string, number][] = [];
  for await (const { kind, bytes: text, number } of lines(file, longest)) all.push([kind, text.toString('latin1'), number]);
  return all;
}

it('splits as a plain split on LF does, whatever the bytes and wherever the pieces end', async () => {
  await fc.assert(
    fc.asyncProperty(fc.array(fc.tuple(fc.constantFrom('a', '\u0000', '\r', 'é'), fc.constantFrom(0, 1, 65_535, 65_536, 65_537)), { maxLength: 5 }), async (runs) => {
      const text = runs.map(([letter, count]) => letter.repeat(count)).join('\n');
      const expected = text.split('\n').map((line, i) => ['whole', line, i + 1]);
      expect(await read(Buffer.from(text + '\n', 'latin1'))).toEqual(expected);
    }),
    { seed: 1, numRuns: 40 },
  );
});

it('an empty file has no line, a file without a last LF a torn one', async () => {
  expect(await read('')).toEqual([]);
  expect(await read('a\nb')).toEqual([['whole', 'a', 1], ['torn', 'b', 2]]);
});

it('keeps the beginning of a line beyond the bound, and goes on behind it', async () => {
  expect(await read('x'.repeat(200_000) + '\nb\n', 10)).toEqual([['long', 'x'.repeat(10), 1], ['whole', 'b', 2]]);
  expect(await read('x'.repeat(10) + '\n', 10)).toEqual([['whole', 'x'.repeat(10), 1]]);
});

it('readLog gives the records and tells what it left out', async () => {
  const file = join(folder(), 'a.log');
  const one = link({ event: 'opened' }, ORIGIN).line;
  const two = link({ event: 'raised' }, ORIGIN).line;
  writeFileSync(file, `${one}\n\u001b[2Jjunk\n${two}\n${two.slice(0, 9)}`);
  const skipped: string[] = [];
  const found: [number, unknown][] = [];
  for await (const { line, record } of readLog([file], (sentence) => skipped.push(sentence))) found.push([line, record['event']]);
  expect(found).toEqual([[1, 'opened'], [3, 'raised']]);
  expect(skipped).toHaveLength(2);
  expect(skipped[0]).toContain(':2: not a record');
  expect(skipped[0]).not.toContain('\u001b');
});
