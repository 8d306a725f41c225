import { describe, expect, it } from 'vitest';
import { Redelivery } from '../../adapters/mqtt/redelivery.js';

const bytes = (text: string): Buffer => Buffer.from(text);

describe('a message that the broker sends again', () => {
  it('is known by its identifier, its flag and its content together', () => {
    const redelivery = new Redelivery();
    expect(redelivery.seen(7, false, 'a', bytes('1'))).toBe(false);
    expect(redelivery.seen(7, true, 'a', bytes('1'))).toBe(true);
    expect(redelivery.seen(8, true, 'a', bytes('1'))).toBe(false); // sent before, but never came
    expect(redelivery.seen(7, true, 'a', bytes('2'))).toBe(false);
    expect(redelivery.seen(7, true, 'b', bytes('2'))).toBe(false);
    expect(redelivery.seen(7, false, 'b', bytes('2'))).toBe(false); // an equal reading that is new
  });

  it('may come as often as it likes', () => {
    const redelivery = new Redelivery();
    redelivery.seen(65_535, false, 'a', bytes('1'));
    expect([1, 2, 3].map(() => redelivery.seen(65_535, true, 'a', bytes('1')))).toEqual([true, true, true]);
  });

  it('is forgotten with the session', () => {
    const redelivery = new Redelivery();
    redelivery.seen(1, false, 'a', bytes('1'));
    redelivery.forget();
    expect(redelivery.seen(1, true, 'a', bytes('1'))).toBe(false);
  });

  it('is not looked for among messages of long ago, whose identifier is in use again', () => {
    const redelivery = new Redelivery();
    redelivery.seen(1, false, 'a', bytes('20.5'));
    for (let id = 2; id < 9000; id++) redelivery.seen(id, false, 'a', bytes('20.5'));
    expect(redelivery.seen(1, true, 'a', bytes('20.5'))).toBe(false);
    expect(redelivery.seen(8999, true, 'a', bytes('20.5'))).toBe(true);
  });
});
