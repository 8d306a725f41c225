import { setTimeout as wait } from 'node:timers/promises';
import { afterEach, describe, expect, it } from 'vitest';
import { show, type Shown } from './fakeTty.js';
import { channel, inventedStand, troubledStand } from './inventedStand.js';

let shown: Shown;
afterEach(() => shown.screen.close());

const chosen = (): string | undefined => shown.tty.lines().find((line) => line.startsWith('▸'));
const UP = '\x1b[A';
const DOWN = '\x1b[B';

describe('choosing a channel', () => {
  it.each([
    ['down twice', [DOWN, DOWN], 'flow'],
    ['j and k', ['j', 'j', 'j', 'k'], 'flow'],
    ['not above the first', [UP, UP], 'coolant-out'],
    ['end', ['\x1b[F'], 'motor-current'],
    ['end and home', ['\x1b[F', '\x1b[H'], 'coolant-out'],
    ['page down', ['\x1b[6~'], 'motor-current'],
    ['page up', ['\x1b[F', '\x1b[5~'], 'coolant-out'],
    ['a click on the fourth row', ['\x1b[<0;20;5M\x1b[<0;20;5m'], 'head-pressure'],
    ['the wheel', ['\x1b[<65;5;9M', '\x1b[<65;5;9M'], 'flow'],
  ])('%s', async (_, keys, expected) => {
    shown = await show(inventedStand());
    await shown.type(...keys);
    expect(chosen()).toContain(expected);
    expect(shown.told.at(-1)).toBe(expected); // the owner makes its statistics
  });

  it('n goes to the next channel in alarm, and on from the last to the first', async () => {
    const base = troubledStand();
    const channels = [...base.channels];
    channels[5] = channel(5, { state: 'alarm' });
    shown = await show({ ...base, channels });
    await shown.type('n');
    expect(chosen()).toContain('flow');
    await shown.type('n');
    expect(chosen()).toContain('motor-current');
    await shown.type('n');
    expect(chosen()).toContain('flow');
  });
});

describe('keys that come in pieces', () => {
  it('an arrow in two pieces is one arrow', async () => {
    shown = await show(inventedStand());
    shown.tty.input.write('\x1b');
    await wait(5);
    await shown.type('[B');
    expect(chosen()).toContain('coolant-in');
  });

  it('pasted text and replies of the terminal are no keys', async () => {
    shown = await show(inventedStand());
    await shown.type('\x1b[200~jjqf\x1b[201~', '\x1b[?62;22c', '\x1b]11;rgb:0000/0000/0000\x07');
    expect(chosen()).toContain('coolant-out');
    expect(shown.told).not.toContain('quit');
  });
});

describe('help', () => {
  it('lies over the picture, any key closes it and does nothing else', async () => {
    shown = await show(inventedStand());
    await shown.type('?');
    expect(shown.tty.text()).toContain('kilter: keys and signs');
    await shown.type('q');
    expect(shown.told).not.toContain('quit');
    expect(shown.tty.text()).not.toContain('kilter: keys and signs');
  });

  it('a click closes it and chooses nothing, the wheel passes it by', async () => {
    shown = await show(inventedStand());
    await shown.type('?', '\x1b[<65;5;9M');
    expect(shown.tty.text()).toContain('kilter: keys and signs');
    await shown.type('\x1b[<0;20;5M\x1b[<0;20;5m');
    expect(shown.tty.text()).not.toContain('kilter: keys and signs');
    expect(chosen()).toContain('coolant-out');
  });

  it('Ctrl-C quits even then', async () => {
    shown = await show(inventedStand());
    await shown.type('?', '\x03');
    expect(shown.told).toContain('quit');
  });
});

it('space holds the picture, the stand and its clock go on, space lets it run', async () => {
  const base = inventedStand();
  let second = 0;
  shown = await show(() => {
    base.channels[0]!.trend.fill(82.4);
    return { ...base, now: base.now + 1000 * second++ };
  });
  const clock = (): string => shown.tty.lines()[0]!.slice(-12);
  const picture = (): string[] => shown.tty.lines().slice(1);
  await shown.type(' ');
  const held = [clock(), picture()];
  base.channels[0]!.trend.fill(82.7);
  await shown.frame();
  await shown.frame();
  expect(picture()).toEqual(held[1]);
  expect(clock()).not.toBe(held[0]);
  expect(shown.tty.lines().at(-1)).toContain('held');
  await shown.type(' ');
  expect(picture()).not.toEqual(held[1]);
  expect(shown.tty.text()).not.toContain('held');
});

it('who holds the picture is told of an alarm all the same', async () => {
  let view = inventedStand();
  shown = await show(() => view);
  await shown.type(' ');
  view = troubledStand();
  await shown.frame();
  expect(shown.tty.lines()[0]).toContain('■ 2 alarms stand on 1 of 6 channels');
  expect(shown.tty.text()).toMatch(/■ ALARM high flow +41\.3 L\/min/); // its value is the held one
  expect(shown.tty.text()).toContain('flow is above its control limit');
});

it('+ and - change how many readings the trend shows', async () => {
  shown = await show(inventedStand());
  expect(shown.tty.text()).toContain('120 readings, 23.8 s');
  await shown.type('+');
  expect(shown.tty.text()).toContain('300 readings');
  await shown.type('-', '-', '-', '-');
  expect(shown.tty.text()).toContain('60 readings');
});

it('Enter shows the figures of the channel and takes them away', async () => {
  shown = await show(inventedStand());
  await shown.type('\r');
  for (const words of ['learned, n 500', '82.400 ± 0.005', '82.04 to 82.76 (3σ)', 'median', 'MAD', 'lag-1', '0.043', '600 readings', '1 in 3'])
    expect(shown.tty.text()).toContain(words);
  await shown.type('\r');
  expect(shown.tty.text()).not.toContain('lag-1');
});

it('f shows a state that can be read from across the room, and a word for each channel', async () => {
  shown = await show(troubledStand());
  await shown.type('f');
  expect(shown.tty.text()).toMatch(/█{4,}/);
  expect(shown.tty.text()).toMatch(/■ ALARM high\s+flow/);
  expect(shown.tty.text()).toMatch(/○ settling\s+bearing-vibration/);
  expect(shown.tty.text()).toMatch(/· normal\s+coolant-out/);
  await shown.type('f');
  expect(shown.tty.text()).toContain('[°C]');
});

it('q quits once, and gives the terminal back', async () => {
  shown = await show(inventedStand());
  await shown.type('q', 'q');
  expect(shown.told.filter((word) => word === 'quit')).toHaveLength(1);
  for (const off of ['\x1b[?1049l', '\x1b[?25h', '\x1b[?1000l', '\x1b[?1006l', '\x1b[?2004l']) expect(shown.tty.wire).toContain(off);
});
