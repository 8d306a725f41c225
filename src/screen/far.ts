import type { ChannelView, StandView } from './model.js';
import type { Raster } from './raster.js';
import { standingByChannel, stateMark } from './roster.js';
import type { Theme } from './theme.js';

/** Letters of three by five, a row of each in three bits, top row first. */
const FONT: Readonly<Record<string, string>> = {
  A: '25755', B: '65656', C: '34443', D: '65556', E: '74647', F: '74644', G: '34553', H: '55755', I: '72227', J: '11152', K: '55655', L: '44447',
  M: '57755', N: '65555', O: '25552', P: '65644', Q: '25563', R: '65655', S: '34216', T: '72222', U: '55557', V: '55552', W: '55775', X: '55255',
  Y: '55222', Z: '71247', 0: '75557', 1: '26227', 2: '71747', 3: '71317', 4: '55711', 5: '74717', 6: '74757', 7: '71122', 8: '75757', 9: '75717',
  '-': '00700', '.': '00002', ' ': '00000',
};

/** The state of the stand in letters that can be read from across the room, those of the channels in alarm, and a word for each. */
export function drawFar(r: Raster, t: Theme, view: StandView, row: number, height: number): void {
  const alarmed = view.channels.filter(({ state }) => state === 'alarm');
  const settling = view.channels.filter(({ state }) => state === 'settling' || state === 'waiting');
  const rest = view.channels.filter(({ state }) => state === 'normal');
  const [words, attrs] = farWords(t, view, alarmed.length, settling.length);
  const bottom = row + height;
  const scale = Math.max(1, Math.min(Math.floor(r.width / (words.length * 8)), Math.floor(height / 12)));
  let at = row + 1;
  at += banner(r, words, at, scale, attrs) + 1;
  for (const { channel } of alarmed) {
    if (at + 8 > bottom) break;
    at += banner(r, channel.toUpperCase(), at, 1, t.strong) + 1;
  }
  drawStates(r, t, view, [...alarmed, ...settling, ...rest], at, bottom - at);
}

/** The one thing to know from across the room. "All well" is said only while nothing at all is amiss. */
function farWords(t: Theme, { channels, sources, logTrouble }: StandView, alarmed: number, settling: number): readonly [words: string, attrs: number] {
  if (alarmed > 0) return [`${alarmed} IN ALARM`, t.alarm];
  if (logTrouble !== null) return ['LOG TROUBLE', t.alarm];
  if (sources.some(({ phase }) => phase === 'lost')) return ['SOURCE LOST', t.caution];
  if (channels.length === 0) return ['NO CHANNELS', t.plain];
  if (sources.length > 0 && sources.every(({ phase }) => phase === 'ended' || phase === 'stopped')) return ['ENDED', t.note];
  return settling > 0 ? ['SETTLING', t.plain] : ['ALL WELL', t.plain];
}

const COLUMN = 38;

/** A shape, a word and the name of each channel, the pressing ones first. */
function drawStates(r: Raster, t: Theme, view: StandView, channels: readonly ChannelView[], row: number, height: number): void {
  if (height <= 0) return;
  const across = Math.max(1, Math.floor((r.width - 2) / COLUMN));
  const alarms = standingByChannel(view);
  const room = across * height;
  const shown = channels.length > room ? room - 1 : channels.length;
  for (let i = 0; i < shown; i++) {
    const channel = channels[i]!;
    const [mark, word, attrs] = stateMark(t, channel, alarms.get(channel.channel) ?? null);
    const column = 2 + (i % across) * COLUMN;
    const y = row + Math.floor(i / across);
    r.put(column, y, mark, attrs);
    r.text(column + 2, y, word, attrs, 11);
    r.text(column + 14, y, channel.channel, t.plain, COLUMN - 16);
  }
  if (shown < channels.length) r.text(2 + (shown % across) * COLUMN, row + height - 1, `and ${channels.length - shown} more`, t.faint);
}

/** Large letters, closer or narrower where there are many; an end that still has no room is left out with dots. @returns rows taken */
function banner(r: Raster, words: string, row: number, scale: number, attrs: number): number {
  const all = Array.from(words);
  const fits = (wide: number, gap: number): boolean => all.length * (3 * wide + gap) - gap <= r.width;
  const wide = fits(2 * scale, scale) ? 2 * scale : scale;
  const gap = fits(wide, wide) ? wide : scale;
  const pitch = 3 * wide + gap;
  const room = Math.max(1, Math.floor((r.width + gap) / pitch));
  const letters = all.length <= room ? all : [...all.slice(0, Math.max(0, room - 3)), '.', '.', '.'];
  let left = Math.max(0, Math.floor((r.width - letters.length * pitch + gap) / 2));
  for (const letter of letters) {
    const shape = FONT[letter] ?? FONT['-']!;
    for (let y = 0; y < 5; y++)
      for (let x = 0; x < 3; x++) {
        if (!((Number(shape[y]) >> (2 - x)) & 1)) continue;
        for (let dy = 0; dy < scale; dy++) for (let dx = 0; dx < wide; dx++) r.put(left + x * wide + dx, row + y * scale + dy, '█', attrs);
      }
    left += pitch;
  }
  return 5 * scale;
}
