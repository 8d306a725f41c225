import { formatDuration, formatOdds, formatValue, formatZ } from '../engine/format.js';
import type { AlarmView, ChannelView, StandView } from './model.js';
import type { Raster } from './raster.js';
import type { Theme } from './theme.js';

/** Alarms in words, standing ones first, each with its age; then those that lately cleared. */
export function drawAlarms(r: Raster, t: Theme, view: StandView, row: number, height: number): void {
  const standing = view.alarms.filter(({ clearedAt }) => clearedAt === null);
  if (view.alarms.length === 0) {
    r.text(1, row, 'No alarm has been raised.', t.faint);
    return;
  }
  const lines = [...standing, ...view.alarms.filter(({ clearedAt }) => clearedAt !== null)];
  let at = row;
  for (const [i, alarm] of lines.entries()) {
    const left = row + height - at;
    if (left <= 0) return;
    if (left === 1 && lines.length - i > 1 && standing.length - i > 1) {
      r.text(3, at, `and ${standing.length - i} more alarms stand`, t.alarm);
      return;
    }
    const over = alarm.clearedAt !== null;
    const age = formatDuration(Math.max(0, view.now - (alarm.clearedAt ?? alarm.since)));
    const attrs = over ? t.faint : t.alarm;
    r.put(1, at, over ? '·' : '■', attrs);
    r.text(3, at, over ? `over ${age.split(' ').slice(0, 2).join(' ')}` : age, attrs, 14);
    at += wrapped(r, words(alarm), 17, at, r.width - 18, over ? t.faint : t.plain, over ? 1 : Math.min(2, standing.length - i > 1 ? left - 1 : left));
  }
}

/** The sentence, with the odds where it does not tell them, and how often the alarm has been signalled. */
function words({ sentence, odds, signals, clearedAt }: AlarmView): string {
  const chance = odds === null || sentence.includes('1 in ') ? '' : ` (${formatOdds(odds)})`;
  return `${chance === '' ? sentence : `${sentence.replace(/\.$/, '')}${chance}.`}${clearedAt === null && signals > 1 ? ` ${signals} signals.` : ''}`;
}

const KEPT = '\u00a0'; // a blank that no line is broken at

/** Text over at most so many rows, broken at blanks but not within a number or odds. @returns the rows taken */
function wrapped(r: Raster, text: string, column: number, row: number, width: number, attrs: number, most: number): number {
  let rest = text.replace(/(\d) (?=\d{3}\b)/g, `$1${KEPT}`).replace(/\b1 in (?=\d)/g, `1${KEPT}in${KEPT}`);
  const say = (words: string, line: number): number => r.text(column, line, words.replaceAll(KEPT, ' '), attrs);
  for (let i = 0; i < most; i++) {
    if (rest.length <= width || i === most - 1) {
      say(rest.length <= width ? rest : `${rest.slice(0, width - 1)}…`, row + i);
      return i + 1;
    }
    const cut = rest.lastIndexOf(' ', width);
    const end = cut > width / 2 ? cut : width;
    say(rest.slice(0, end), row + i);
    rest = rest.slice(end).trimStart();
  }
  return most;
}

/** The chosen channel in figures: its band and how well it is known, and the rolling window. */
export function drawFigures(r: Raster, t: Theme, c: ChannelView, row: number, height: number): void {
  const { band, window: w } = c; // the unit stands in the title above
  const value = (x: number): string => formatValue(x, band?.sigma ?? null, c.resolution);
  const fine = (x: number): string => formatValue(x, (band?.sigma ?? Math.abs(x)) / 5);
  const pairs: [string, string][] = [];
  if (band) {
    pairs.push(
      ['band', `${band.origin}${band.n === null ? '' : `, n ${band.n}`}`],
      ['centre', `${fine(band.centre)}${band.centreUncertainty === null ? '' : ` ± ${fine(band.centreUncertainty)}`}`],
      ['sigma', `${fine(band.sigma)}${band.sigmaUncertainty === null ? '' : ` ± ${fine(band.sigmaUncertainty)}`}`],
      ['limits', `${value(band.low)} to ${value(band.high)} (${band.k}σ)`],
    );
  } else pairs.push(['band', c.settled ? `${c.settled[0]} of ${c.settled[1]} readings` : 'none']);
  pairs.push(['newest', c.z === null || c.odds === null || !Number.isFinite(c.z) ? '-' : `${formatZ(c.z)}σ, ${formatOdds(c.odds)}`]);
  if (w)
    pairs.push(
      ['window', `${w.n} readings`],
      ['mean', fine(w.mean)],
      ['sd', fine(w.sd)],
      ['median', fine(w.median)],
      ['MAD', fine(w.mad)],
      ['min, max', `${value(w.min)}, ${value(w.max)}`],
      ['lag-1', c.lag1 === null || Number.isNaN(c.lag1) ? '-' : c.lag1.toFixed(3)],
    );
  const NAMES = 9;
  for (let first = 0, column = 1; first < pairs.length && column < r.width; first += height) {
    const group = pairs.slice(first, first + height);
    group.forEach(([name, text], i) => {
      r.text(column, row + i, name, t.faint);
      r.text(column + NAMES, row + i, text, t.plain);
    });
    column += NAMES + 3 + group.reduce((widest, [, text]) => Math.max(widest, text.length), 0);
  }
}
