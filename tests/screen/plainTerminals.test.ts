import { afterEach, expect, it } from 'vitest';
import { show, type Shown } from './fakeTty.js';
import { channel, inventedStand, troubledStand } from './inventedStand.js';

let shown: Shown;
afterEach(() => shown.screen.close());

const EVIL = 'a\x1b[2J\x9b2J\x9d0;title\x9c\x1b]52;c;YQ==\x07{red-fg}\u202eb\u0007';
const COLOUR = /\x1b\[(?:\d+;)*(?:3[0-8]|4[0-8]|9[0-7]|10[0-7])(?:;\d+)*m/; // SGR (ECMA-48, and the aixterm range)

it('with NO_COLOR no colour leaves, and the alarm is still plain to see', async () => {
  shown = await show(troubledStand(), { env: { TERM: 'xterm-256color', LANG: 'C.UTF-8', NO_COLOR: '1' } });
  await shown.type('f', 'f', '?', 'x', '\r');
  expect(shown.tty.wire).not.toMatch(COLOUR);
  expect(shown.tty.text()).toContain('■ ALARM high');
});

it('the same stand with colours does send them: the check above can fail', async () => {
  shown = await show(troubledStand());
  expect(shown.tty.wire).toMatch(COLOUR);
});

it('under LC_ALL=C nothing but ASCII leaves, in any view', async () => {
  const view = troubledStand();
  const channels = [...view.channels, channel(0, { channel: 'Ω-µ-温度', unit: 'm²·s⁻¹ ±‰' })];
  shown = await show({ ...view, channels, notice: 'limits at ±3σ…' }, { env: { TERM: 'xterm-256color', LC_ALL: 'C', LANG: 'en_GB.UTF-8' } });
  await shown.type('\r', 'f', 'f', '?', 'x', '\x1b[F', ' ');
  expect(shown.tty.wire).toMatch(/^[\x00-\x7f]*$/);
  expect(shown.tty.text()).toContain('degC');
  expect(shown.tty.text()).toContain('# ALARM high');
});

it('the Linux console gets blocks, no braille and no mouse', async () => {
  shown = await show(troubledStand(), { env: { TERM: 'linux', LANG: 'C.UTF-8' } });
  expect(shown.tty.wire).not.toMatch(/[\u2801-\u28ff]/);
  expect(shown.tty.text()).toMatch(/[▀▄█]/);
  expect(shown.tty.wire).not.toContain('\x1b[?1000h');
});

it.each([
  ['escape sequences, C1 controls, tags and a change of direction', EVIL],
  ['ten thousand characters of them', EVIL.repeat(Math.ceil(10_000 / EVIL.length))],
])('names, units and sentences never reach the terminal raw: %s', async (_, evil) => {
  const base = inventedStand();
  const view = {
    ...base, stand: evil, notice: evil, logTrouble: null,
    channels: [channel(0, { channel: evil, unit: evil, state: 'alarm' }), ...base.channels],
    alarms: [{ alarm: evil, channel: evil, detector: 'one-beyond-3', side: 'high', sentence: evil, odds: 0.01, since: base.now, signals: 1, clearedAt: null } as const],
    sources: [{ source: evil, phase: 'lost', sentence: evil, faults: 0 } as const],
  };
  shown = await show(view);
  let title = '';
  shown.tty.terminal.onTitleChange((now) => (title = now));
  shown.screen.message(evil);
  await shown.type('f', 'f', '\r', '?', 'x');
  expect(title).toBe('');
  const { wire } = shown.tty;
  expect(wire).not.toMatch(/[\x07\x80-\x9f\u202e]/);
  expect(wire).not.toContain('\x1b]');
  expect(wire.split('\x1b[2J').length - 1).toBeLessThanOrEqual(2); // only those of blessed itself, when it takes the screen
  expect(shown.tty.text()).toContain('a·[2J');
  expect(shown.tty.text()).toContain('{red-fg}');
});

it('characters that are two cells wide, or none, move nothing that stands beside them', async () => {
  const base = inventedStand();
  shown = await show({ ...base, channels: [channel(0, { channel: '温度センサ', unit: '\u{1f600}' }), channel(1, { channel: 'e\u0301e\u0301\u200d\ufe0f' }), ...base.channels.slice(2)] });
  const columns = shown.tty.lines().slice(1, 4).map((line) => line.indexOf('┊') - line.indexOf('normal'));
  const zeros = shown.tty.lines().slice(1, 7).map((line) => line.search(/σ/));
  expect(new Set(zeros).size).toBe(1);
  expect(columns.every((column) => column === columns[0])).toBe(true);
  expect(shown.tty.lines()[0]!.length).toBe(80);
});
