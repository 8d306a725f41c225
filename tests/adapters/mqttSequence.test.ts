import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { SequenceGate } from '../../adapters/mqtt/sequenceGate.js';

const through = (numbers: readonly number[], gate = new SequenceGate()): number[] => numbers.filter((number) => gate.take(number));

describe('the sequence gate', () => {
  it.each([
    ['lets a rising count through', [1, 2, 3, 4], [1, 2, 3, 4]],
    ['begins anywhere', [500, 501], [500, 501]],
    ['begins below zero', [-3, -2, -1, 0, 1], [-3, -2, -1, 0, 1]],
    ['drops what it has seen', [1, 2, 2, 1, 3, 3], [1, 2, 3]],
    ['lets a late one through, once', [1, 2, 4, 5, 3, 3, 6], [1, 2, 4, 5, 3, 6]],
    ['bears gaps', [1, 2, 1000, 1001, 1000], [1, 2, 1000, 1001]],
    ['takes a counter that begins anew at 0', [98, 99, 100, 0, 1, 2, 1], [98, 99, 100, 0, 1, 2]],
    ['takes a counter that begins anew at 1', [98, 99, 100, 1, 2], [98, 99, 100, 1, 2]],
    ['takes one that falls far', [100_000, 100_001, 50, 51, 50], [100_000, 100_001, 50, 51]],
    ['forgets nothing across a leap of more than it remembers', [1, 20_000, 20_001, 20_000], [1, 20_000, 20_001]],
  ])('%s', (_, numbers, expected) => {
    expect(through(numbers)).toEqual(expected);
  });

  it.each([4, 8, 16])('takes a counter of %d bits round and round', (bits) => {
    const size = 2 ** bits;
    const numbers = Array.from({ length: 3 * size }, (_, i) => i % size);
    expect(through(numbers)).toEqual(numbers);
  });

  it('does not take what the broker says it sent before for a new beginning', () => {
    const gate = new SequenceGate();
    through([0, 1, ...Array.from({ length: 98 }, (_, i) => i + 2)], gate);
    expect([gate.take(0, true), gate.take(1, true), gate.take(2, true)]).toEqual([false, false, false]);
    expect(gate.take(0)).toBe(true);
  });

  it('lets each number of a repeated and shuffled stretch through once', () => {
    const stretch = fc
      .tuple(fc.integer({ min: 2, max: 2 ** 40 }), fc.integer({ min: 1, max: 200 }))
      .chain(([first, length]) => {
        const numbers = Array.from({ length }, (_, i) => first + i);
        return fc.array(fc.constantFrom(...numbers), { maxLength: 400 }).map((again) => [...numbers, ...again]);
      });
    fc.assert(
      fc.property(stretch, (numbers) => {
        expect(through(numbers)).toEqual([...new Set(numbers)]);
      }),
      { seed: 21, numRuns: 300 },
    );
  });

  it('agrees with a set of all numbers while they stay within its reach', () => {
    const walk = fc.array(fc.integer({ min: -50, max: 60 }), { maxLength: 300 }).map((steps) => {
      let at = 1_000_000;
      return steps.map((step) => (at += step));
    });
    fc.assert(
      fc.property(walk, (numbers) => {
        expect(through(numbers)).toEqual([...new Set(numbers)]);
      }),
      { seed: 22, numRuns: 300 },
    );
  });
});
