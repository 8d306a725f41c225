import fc from 'fast-check';
import { expect, it } from 'vitest';
import { History } from '../../src/stand/history.js';

it('holds the newest readings, oldest first, whatever its capacity and that of the picture', () => {
  fc.assert(
    fc.property(fc.integer({ min: 1, max: 20 }), fc.integer({ min: 0, max: 60 }), fc.integer({ min: 1, max: 25 }), (capacity, pushed, room) => {
      const history = new History(capacity);
      const all = Array.from({ length: pushed }, (_, i) => i);
      for (const i of all) history.push(1000 + i, i);
      const values = new Float64Array(room);
      const times = new Float64Array(room);
      const n = history.copy(values, times);
      const expected = all.slice(-Math.min(capacity, room));
      if (pushed === 0) expect(n).toBe(0);
      else {
        expect([...values.subarray(0, n)]).toEqual(expected);
        expect([...times.subarray(0, n)]).toEqual(expected.map((i) => 1000 + i));
      }
    }),
    { seed: 1 },
  );
});
