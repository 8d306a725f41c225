import { expect, it } from 'vitest';
import { Backlog } from '../../src/record/backlog.js';
import { seal } from '../../src/record/chain.js';
import { ignore } from './folder.js';

function record(index: number, length: number): ReturnType<typeof seal> {
  return seal({ event: 'raised', index, sentence: 'x'.repeat(length) });
}

function heads(backlog: Backlog): string[] {
  return backlog.peek(Infinity, 0).map(({ record: { head } }) => head);
}

it('once one was dropped all are, also those that would fit, until the loss is on record: order holds', () => {
  let time = 1000;
  const backlog = new Backlog(2000, () => time++);
  expect(backlog.add(record(0, 1400), ignore)).toBe(true);
  expect(backlog.add(record(1, 1400), ignore)).toBe(false);
  expect(backlog.add(record(2, 1), ignore)).toBe(false);
  expect([backlog.length, backlog.lost]).toEqual([1, 2]);
  backlog.remove(1);
  expect([backlog.length, backlog.lost]).toEqual([1, 0]);
  expect(backlog.add(record(3, 1), ignore)).toBe(true);
  expect(heads(backlog)).toEqual([
    '{"count":2,"event":"lost","from":"1970-01-01T00:00:01.000Z",',
    '{"event":"raised","index":3,',
  ]);
  expect(backlog.taken).toBe(3);
});

it('a record larger than all the memory is dropped, and that is on record at once', () => {
  const backlog = new Backlog(500, () => 0);
  expect(backlog.add(record(0, 600), ignore)).toBe(false);
  expect(heads(backlog)).toEqual([expect.stringContaining('"event":"lost"')]);
});

it('peek gives what fits, and no fewer than asked for', () => {
  const backlog = new Backlog(1 << 20, () => 0);
  for (let i = 0; i < 5; i++) backlog.add(record(i, 10), ignore);
  const { bytes } = record(0, 10);
  expect([0, 1, bytes, 3 * bytes, Infinity].map((limit) => backlog.peek(limit, 0).length)).toEqual([0, 0, 1, 3, 5]);
  expect(backlog.peek(0, 2)).toHaveLength(2);
});
