import { describe, expect, it } from 'vitest';
import { Channel } from '../../src/engine/channel.js';
import { spec } from './spec.js';

const watched = (): Channel => new Channel(spec({ rules: [], silentAfter: 2000, every: 100 }));

describe('silent', () => {
  it('says for how long nothing came, and how often something is due', () => {
    const channel = watched();
    channel.take(0, 40);
    expect(channel.tick(5200)[1]).toMatchObject({
      evidence: { limits: { silentAfter: 2000, silence: 5200 }, readings: [{ index: 0, time: 0, value: 40 }] },
      sentence: 'Nothing has come from flow for 5.2 s; a reading is due every 100 ms.',
    });
  });

  it('counts from the newest time, whatever order readings come in', () => {
    const channel = watched();
    channel.take(5000, 40);
    channel.take(1000, 40);
    expect(channel.lastTime).toBe(5000);
    expect(channel.tick(7000)).toEqual([]);
    expect(channel.tick(7001)).toHaveLength(2);
  });

  it('ends with a reading that is off the scale too: the channel speaks', () => {
    const channel = watched();
    channel.take(0, 40);
    channel.tick(3000);
    expect(channel.take(3100, NaN).filter(({ event }) => event === 'cleared')).toMatchObject([{ detector: 'silent' }]);
  });

  it('is watched while the channel settles', () => {
    const channel = new Channel(spec({ band: { learn: 100 }, silentAfter: 2000 }));
    channel.take(0, 40);
    expect(channel.tick(2001)).toHaveLength(2);
    expect(channel.take(2100, 40)).toMatchObject([{ event: 'cleared', detector: 'silent' }]);
  });

  it('is not watched where no interval is known', () => {
    const channel = new Channel(spec({ rules: [], silentAfter: null }));
    channel.take(0, 40);
    expect(channel.tick(1e12)).toEqual([]);
  });
});
