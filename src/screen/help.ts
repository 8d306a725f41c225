import type { Raster } from './raster.js';
import type { Theme } from './theme.js';

const LINES: readonly string[] = [
  'kilter: keys and signs',
  '',
  '↑ ↓  j k   choose a channel (Home, End, Page keys, wheel, click)',
  'n          next channel in alarm',
  'Enter      figures of the channel, or the alarms in words',
  '+ -        show more or fewer readings',
  'space      hold the picture; the watch goes on',
  'f          far view, to be read from across the room',
  'q          quit (also Ctrl-C)',
  '',
  'Row: ● is the newest reading in sigmas, │ the control limits, ┊ the centre.',
  'Picture: the trend, and on the same axis the histogram with the curve of',
  'the band. Long dashes: limits; short: centre; dots: zones, tolerance.',
  '● marks a reading beyond a limit. Spread: from reading to reading.',
  '',
  'kilter is no safety system. Any key closes this.',
];

export function drawHelp(r: Raster, t: Theme): void {
  const width = Math.min(r.width, Math.max(...LINES.map(({ length }) => length)) + 4);
  const height = Math.min(r.height, LINES.length + 2);
  const [left, top] = [(r.width - width) >> 1, (r.height - height) >> 1];
  const [right, bottom] = [left + width - 1, top + height - 1];
  r.wipe(left, top, width, height);
  for (let x = left; x <= right; x++) for (const y of [top, bottom]) r.put(x, y, '─', t.faint);
  for (let y = top + 1; y < bottom; y++) for (const x of [left, right]) r.put(x, y, '│', t.faint);
  for (const [x, y, corner] of [[left, top, '┌'], [right, top, '┐'], [left, bottom, '└'], [right, bottom, '┘']] as const) r.put(x, y, corner, t.faint);
  LINES.slice(0, height - 2).forEach((line, i) => r.text(left + 2, top + 1 + i, line, i === 0 ? t.strong : t.plain, width - 4));
}
