import { afterEach, describe, expect, it } from 'vitest';
import { show, type Shown } from './fakeTty.js';
import { alarm, channel, inventedStand, NOW, troubledStand } from './inventedStand.js';
import type { ChannelView } from '../../src/screen/model.js';

let shown: Shown;
afterEach(() => shown.screen.close());

const bare = (given: Partial<ChannelView>): ChannelView => channel(0, { readings: 0, band: null, z: null, odds: null, time: null, ...given });

describe('sizes', () => {
  it('a resize is followed, to larger and to smaller', async () => {
    shown = await show(inventedStand());
    for (const [columns, rows] of [[120, 40], [200, 60], [80, 24], [61, 17]] as const) {
      shown.tty.resize(columns, rows);
      await new Promise((done) => setTimeout(done, 90)); // resizes are gathered for 60 ms
      await shown.frame();
      expect(shown.tty.lines()[0]).toMatch(/09:41:30 UTC$/);
      expect(shown.tty.lines()[0]!.length).toBe(columns);
      expect(shown.tty.lines()[rows - 1]).toContain('2 of 2 sources open');
    }
  });

  it('too small a terminal is told so in one line, with the alarms', async () => {
    shown = await show(troubledStand(), { columns: 50, rows: 10 });
    expect(shown.tty.text().trim()).toBe('■ 2 ALARMS. Too small: 50x10, needs 60x16.');
    expect(shown.told).not.toContain('quit');
  });

  it.each([[1, 1], [2, 30], [300, 2]])('%i x %i does no harm', async (columns, rows) => {
    shown = await show(troubledStand(), { columns, rows });
    await shown.type('f', '?', 'x', '\x1b[F');
    expect(shown.told.filter((word) => word.startsWith('fatal'))).toEqual([]);
  });
});

describe('numbers of channels', () => {
  it('none', async () => {
    shown = await show(inventedStand({}, 0));
    await shown.type('j', 'n', '\r', '\x1b[6~', 'f', 'f', ' ');
    expect(shown.tty.text()).toContain('This stand has no channels.');
    expect(shown.told).toEqual([]);
  });

  it('with 200 the roster scrolls, and the chosen one stays in sight', async () => {
    shown = await show(inventedStand({}, 200));
    const chosen = (): string => shown.tty.lines().find((line) => line.startsWith('▸')) ?? '';
    await shown.type('\x1b[F');
    expect(chosen()).toContain('coolant-in-200');
    expect(shown.tty.text()).toContain('194 above, 0 below');
    await shown.type('\x1b[5~');
    expect(chosen()).not.toBe('');
    await shown.type('\x1b[H');
    expect(chosen()).toContain('coolant-out');
    expect(shown.tty.text()).toContain('0 above, 194 below');
  });
});

describe('values', () => {
  it.each([
    [NaN, 'not a number'],
    [Infinity, 'over range'],
    [-Infinity, 'under range'],
    [1.7976931348623157e308, '1.798e308'],
    [-5e-324, '-4.941e-324'],
    [0, '0.00'],
  ])('%f is shown as %s', async (value, words) => {
    const c = channel(0, { value, z: Number.isFinite(value) ? 4.2e300 : value });
    for (let i = 0; i < 20; i++) c.trend[c.trendLength - 1 - i] = value;
    shown = await show(inventedStand({ channels: [c, channel(1)] }));
    await shown.type('f', 'f', '\r');
    expect(shown.told.filter((word) => word.startsWith('fatal'))).toEqual([]);
    expect(shown.tty.lines()[1]).toContain(words);
    expect(shown.tty.text()).not.toMatch(/NaN|Infinity|undefined/);
  });

  it('all readings the same, without a band', async () => {
    const c = bare({ state: 'settling', settled: [3, 500], index: 2, value: 5, trend: new Float64Array(10).fill(5), trendTimes: new Float64Array(10), trendLength: 3 });
    shown = await show(inventedStand({ channels: [c] }));
    expect(shown.tty.text()).toContain('3/500');
    expect(shown.tty.lines()[0]).toContain('1 of 1 channel still settling, no alarm');
  });

  it('nothing has come, and an old value waits for a new one', async () => {
    shown = await show(inventedStand({ channels: [bare({ state: 'waiting', index: -1, value: null }), bare({ channel: 'inlet', state: 'waiting', index: -1, value: 20.5, stale: true, time: NOW - 60_000 })] }));
    expect(shown.tty.lines()[0]).toContain('waiting for the first readings');
    expect(shown.tty.text()).toContain('Nothing has come from this channel yet.');
    expect(shown.tty.colourOf('○ old value')).toBe(75);
    await shown.type('j');
    expect(shown.tty.text()).toContain('The value shown is an old one');
  });

  it.each([['silent', 'SILENT'], ['frozen', 'FROZEN'], ['off-scale', 'OFF SCALE']] as const)('%s has a word of its own', async (detector, word) => {
    shown = await show(inventedStand({ channels: [channel(2, { state: 'alarm' })], alarms: [alarm({ detector, side: null, odds: null })] }));
    expect(shown.tty.colourOf(`■ ${word}`)).toBe(167);
  });

  it('a silent channel, whose picture stands still, says how old its last reading is', async () => {
    const c = channel(2, { state: 'alarm', time: NOW - 95_000 });
    shown = await show(inventedStand({ channels: [c], alarms: [alarm({ detector: 'silent', side: null, odds: null })] }));
    expect(shown.tty.lines()[2]).toContain('the last one 1 min 35 s ago');
    expect(shown.tty.colourOf('the last one')).toBe(167);
    shown.screen.close();
    shown = await show(inventedStand({ channels: [c], alarms: [alarm({ detector: 'silent', side: null, odds: null, clearedAt: NOW })] }));
    expect(shown.tty.text()).not.toContain('the last one');
  });
});

describe('the status line', () => {
  it('trouble of the alarm log comes before all else', async () => {
    shown = await show({ ...troubledStand(), logTrouble: 'the disk is full; alarms are kept in memory' });
    expect(shown.tty.lines().at(-1)).toMatch(/^ ■ alarm log: the disk is full/);
    expect(shown.tty.text()).toContain('Mend the alarm log first');
  });

  it('a passing word and a lasting notice', async () => {
    shown = await show(inventedStand({ notice: 'limits: textbook' }), { columns: 120 });
    expect(shown.tty.lines().at(-1)).toContain('limits: textbook');
    shown.screen.message('band accepted');
    await shown.frame();
    expect(shown.tty.lines().at(-1)).toContain('band accepted');
  });

  it('more alarms than there is room for are counted', async () => {
    const alarms = Array.from({ length: 30 }, (_, i) => alarm({ alarm: `flow#${i}`, since: NOW - i * 1000 }));
    shown = await show(inventedStand({ alarms }));
    expect(shown.tty.text()).toMatch(/and \d+ more alarms stand/);
  });
});

it('a fault of a view ends the screen, gives the terminal back, and is told', async () => {
  let broken = false;
  shown = await show(() => {
    if (broken) throw new Error('planted');
    return inventedStand();
  });
  broken = true;
  await shown.frame();
  await shown.frame();
  expect(shown.told.filter((word) => word.startsWith('fatal'))).toEqual(['fatal: planted']);
  expect(shown.tty.wire).toContain('\x1b[?1049l');
});

it('an unchanged frame sends nothing but what changed', async () => {
  shown = await show(troubledStand());
  const before = shown.tty.wire.length;
  await shown.frame();
  expect(shown.tty.wire.length).toBe(before);
});

it('the view is asked for once a frame', async () => {
  let asked = 0;
  shown = await show(() => {
    asked++;
    return inventedStand();
  });
  const before = asked;
  await shown.frame();
  expect(asked).toBe(before + 1);
});
