import type { StandView } from './model.js';
import type { Raster } from './raster.js';
import { advice } from './stateWords.js';
import type { Theme } from './theme.js';
import type { Ui } from './ui.js';

const KEYS = '↑↓ choose  space hold  ? help  q quit';
const KEYS_SHORT = '? help  q quit';

/** What to do next, and at the right the keys that most is done with. */
export function drawHint(r: Raster, t: Theme, view: StandView, ui: Ui, row: number, selected: number): void {
  const words = advice(view, ui, selected);
  const keys = words.length + KEYS.length + 4 <= r.width ? KEYS : KEYS_SHORT;
  r.text(1, row, words, t.plain, r.width - keys.length - 4);
  r.text(r.width - keys.length - 1, row, keys, t.faint);
}

/** Sources, rate, trouble and passing words: what is pressing stands first, so that a narrow screen cuts the rest. */
export function drawStatus(r: Raster, t: Theme, view: StandView, ui: Ui, row: number): void {
  let at = 1;
  const say = (words: string, attrs: number): void => {
    if (at < r.width) at = r.text(at, row, words, attrs) + 3;
  };
  if (ui.held) say('held', t.note);
  if (view.logTrouble !== null) say(`■ alarm log: ${view.logTrouble}`, t.alarm);
  const lost = view.sources.filter(({ phase }) => phase === 'lost');
  if (lost[0]) say(`▸ ${lost[0].source} lost: ${lost[0].sentence}${lost.length > 1 ? ` (and ${lost.length - 1} more)` : ''}`, t.caution);
  if (ui.message !== null) say(ui.message, t.plain);
  const open = view.sources.filter(({ phase }) => phase === 'open').length;
  say(`${open} of ${view.sources.length} ${view.sources.length === 1 ? 'source' : 'sources'} open`, t.faint);
  say(`${view.rate.toFixed(view.rate < 10 ? 1 : 0)} readings/s`, t.faint);
  const faults = view.sources.reduce((sum, source) => sum + source.faults, 0);
  if (faults > 0) say(`${faults} unreadable`, t.faint);
  if (view.notice !== null) say(view.notice, t.faint);
}
