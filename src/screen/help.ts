import type { Raster } from './raster.js';
import type { Theme } from './theme.js';

const LINES: readonly string[] = [
  'What the keys do',
  '',
  '↑ ↓  j k     choose a channel (also Home, End, Page keys, mouse)',
  'n            go to the next channel with an alarm',
  'Enter        figures of the chosen channel, or the alarms',
  '+ -          show more or fewer readings',
  'space        hold the picture; the watch goes on',
  'f            far view, to be read from across the room',
  'q            quit; the alarm log keeps what was raised',
  '',
  'The picture: trend and, on the same axis, the histogram with the curve',
  'of the band. Long dashes are the control limits, short ones the centre,',
  'dots the zones. ● lies beyond a limit.',
  '',
  'kilter is no safety system. Any key closes this.',
];

export function drawHelp(r: Raster, t: Theme): void {
  const width = Math.min(r.width, Math.max(...LINES.map(({ length }) => length)) + 6);
  const height = Math.min(r.height, LINES.length + 2);
  const [column, row] = [(r.width - width) >> 1, (r.height - height) >> 1];
  r.wipe(column, row, width, height);
  for (let x = 0; x < width; x++) for (const y of [row, row + height - 1]) r.put(column + x, y, '─', t.faint);
  LINES.slice(0, height - 2).forEach((line, i) => r.text(column + 3, row + 1 + i, line, i === 0 ? t.strong : t.plain, width - 6));
}
