import { readdirSync } from 'node:fs';
import { join } from 'node:path';
import { describe, expect, it } from 'vitest';
import { requireTextbook } from '../../src/stand/budget.js';
import { loadStand } from '../../src/stand/load.js';
import { GOOD, standFile } from './files.js';

const CONFIG = join(import.meta.dirname, '..', '..', 'config');

describe('a stand file as read', () => {
  const stand = loadStand(standFile(GOOD));

  it('has the channels with what they say and the defaults for the rest', () => {
    expect(stand.channels[0]).toEqual({
      origin: { source: 'logger', field: 'flow', topic: null, value: null, time: null, sequence: null },
      spec: {
        channel: 'flow',
        unit: 'L/min',
        every: 100,
        silentAfter: 2000,
        range: [0, 60],
        tolerance: [38, 44],
        resolution: 0.01,
        band: { centre: 41.2, sigma: 0.31 },
        rules: ['one-beyond-3', 'eight-one-side'],
        k: 3,
        sideRun: 8,
        frozen: true,
        frozenOdds: 1e-9,
        window: 500,
        clearAfter: 10,
      },
    });
    expect(stand.channels[1]!.spec).toMatchObject({
      silentAfter: 5000,
      band: { learn: 500 },
      rules: ['one-beyond-3', 'two-of-three-beyond-2', 'four-of-five-beyond-1', 'eight-one-side'],
    });
  });

  it('has a budget as time, a log beside the file, and a client identifier that stays the same', () => {
    expect(stand.budget).toBe(86_400_000);
    expect(stand.log.file).toMatch(/stand-\d+\.alarms\.jsonl$/);
    const [, bus] = loadStand(stand.file).sources;
    expect(bus).toEqual(stand.sources[1]);
    expect(bus).toMatchObject({ options: { clientId: expect.stringMatching(/^kilter-[0-9a-f]{16}$/) as string } });
  });

  it('takes defaults for all channels from watch', () => {
    const watched = loadStand(standFile(GOOD.replace('  limits: textbook', '  limits: textbook\n  k: 4.5\n  clearAfter: 30')));
    expect(watched.channels.map(({ spec }) => [spec.k, spec.clearAfter])).toEqual([
      [4.5, 30],
      [4.5, 30],
    ]);
  });

  it('whose limits are to come from a budget is read, but not watched', () => {
    const budget = loadStand(standFile(GOOD.replace('textbook', 'budget')));
    expect(() => requireTextbook(budget)).toThrow(/limits: textbook/);
    expect(() => requireTextbook(stand)).not.toThrow();
  });

  it.each(readdirSync(CONFIG).filter((file) => file.endsWith('.yaml')))('config/%s is without fault', (file) => {
    expect(loadStand(join(CONFIG, file)).channels.length).toBeGreaterThan(0);
  });
});
