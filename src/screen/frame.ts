import { formatDuration } from '../engine/format.js';
import { drawFar } from './far.js';
import { drawHelp } from './help.js';
import { layout, SMALLEST, type Layout } from './layout.js';
import { drawAlarms, drawFigures } from './lower.js';
import type { StandView } from './model.js';
import { drawPicture } from './picture.js';
import type { Raster } from './raster.js';
import { drawRoster } from './roster.js';
import { drawSpread } from './spread.js';
import { standing, stateWords } from './stateWords.js';
import { drawHint, drawStatus } from './statusLine.js';
import type { Theme } from './theme.js';
import { selectedIndex, type Ui } from './ui.js';

/** Draws the whole screen into the raster: a function of the view model and of what the user has chosen. */
export function drawFrame(r: Raster, t: Theme, view: StandView, ui: Ui): Layout {
  const places = layout(r.width, r.height, view.channels.length);
  r.clear();
  if (r.width < SMALLEST.width || r.height < SMALLEST.height) {
    const alarms = standing(view);
    r.text(0, 0, `${alarms > 0 ? `■ ${alarms} ALARM${alarms > 1 ? 'S' : ''}. ` : ''}Too small: ${r.width}x${r.height}, needs ${SMALLEST.width}x${SMALLEST.height}.`, alarms > 0 ? t.alarm : t.plain);
    return places;
  }
  const selected = selectedIndex(view, ui);
  const [rosterRow, rosterHeight] = places.roster;
  ui.first = Math.max(0, Math.min(Math.max(ui.first, selected - rosterHeight + 1), Math.max(0, selected), view.channels.length - rosterHeight));
  drawHeader(r, t, view, ui);
  if (ui.far) drawFar(r, t, view, 1, r.height - 3);
  else {
    drawRoster(r, t, view, ui, rosterRow, rosterHeight, selected);
    const channel = view.channels[selected];
    if (channel) {
      drawTitle(r, t, view, ui, places, selected);
      const gutter = drawPicture(r, t, channel, ...places.picture, ui.span);
      if (places.spread[1] > 0) drawSpread(r, t, channel, ...places.spread, ui.span, gutter);
    }
    if (ui.figures && channel) drawFigures(r, t, channel, ...places.lower);
    else drawAlarms(r, t, view, ...places.lower);
  }
  drawHint(r, t, view, ui, places.hint, selected);
  drawStatus(r, t, view, ui, places.status);
  if (ui.help) drawHelp(r, t);
  return places;
}

function drawHeader(r: Raster, t: Theme, view: StandView, ui: Ui): void {
  const clock = `${new Date(view.now).toISOString().slice(11, 19)} UTC`;
  const words = stateWords(view);
  const alarmed = standing(view) > 0;
  let at = r.text(0, 0, view.stand, t.strong, Math.max(10, r.width - words.length - clock.length - 8));
  at = r.text(at + 2, 0, alarmed ? `■ ${words}` : words, alarmed ? t.alarm : t.plain, r.width - at - clock.length - 4);
  if (ui.held) r.text(at + 2, 0, 'held', t.note, r.width - at - clock.length - 3);
  r.text(r.width - clock.length, 0, clock, t.faint);
}

function drawTitle(r: Raster, t: Theme, view: StandView, ui: Ui, places: Layout, selected: number): void {
  const c = view.channels[selected]!;
  for (let x = 0; x < r.width; x++) r.put(x, places.title, '─', t.faint, 1);
  let at = r.text(2, places.title, ` ${c.channel}${c.unit && ` [${c.unit}]`} `, t.strong, 40);
  const shown = Math.min(ui.span, c.trendLength);
  if (shown > 1) {
    const span = c.trendTimes[c.trendLength - 1]! - c.trendTimes[c.trendLength - shown]!;
    at = r.text(at + 1, places.title, ` ${shown} readings, ${formatDuration(span)} `, t.faint, 40);
  }
  const silent = view.alarms.some(({ channel, detector, clearedAt }) => channel === c.channel && detector === 'silent' && clearedAt === null);
  // a picture that stands still looks like one in which nothing changes
  if ((silent || c.stale) && c.time !== null) r.text(at + 1, places.title, ` the last one ${formatDuration(Math.max(0, view.now - c.time))} ago `, silent ? t.alarm : t.note, 40);
  const below = view.channels.length - ui.first - places.roster[1];
  if (view.channels.length > places.roster[1]) {
    const more = ` ${ui.first} above, ${Math.max(0, below)} below `;
    r.text(r.width - more.length - 2, places.title, more, t.faint);
  }
}
