import { describe, expect, it } from 'vitest';
import { Channel } from '../../src/engine/channel.js';
import { spec } from './spec.js';

const channel = (): Channel => new Channel(spec({ band: { centre: 0, sigma: 1 }, rules: [] }));

describe('the histogram', () => {
  it.each([
    [-1e300, 0],
    [-6.01, 0],
    [-6, 1],
    [-5.76, 1],
    [-5.75, 2],
    [-0.01, 24],
    [0, 25],
    [0.25, 26],
    [5.99, 48],
    [6, 49],
    [1e300, 49],
  ])('counts a deviation of %d in bin %d', (z, bin) => {
    const one = channel();
    one.take(0, z);
    expect([...one.histogram].flatMap((count, i) => (count > 0 ? [i] : []))).toEqual([bin]);
  });

  it('stays full once a count is full', () => {
    const one = channel();
    one.histogram[25] = 2 ** 32 - 2;
    for (let i = 0; i < 3; i++) one.take(i, 0);
    expect(one.histogram[25]).toBe(2 ** 32 - 1);
  });
});
