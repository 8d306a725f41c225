import { formatValue } from '../engine/format.js';
import { cdf, pdf } from '../stats/normal.js';
import type { Normal } from './oddsQuestion.js';

/** The part of the line that the picture shades, in units: from..to, or all that lies outside. Ends may be infinite. */
export interface Part {
  readonly from: number;
  readonly to: number;
  readonly outside: boolean;
}

interface Glyphs {
  /** Fillings of a cell from the least to the whole, for the part asked for. */
  readonly asked: string;
  readonly rest: string;
  /** A curve at the bottom, the middle and the top of a cell, where asked and elsewhere. */
  readonly askedCurve: string;
  readonly restCurve: string;
  readonly ruler: string;
  readonly point: string;
  readonly left: string;
  readonly right: string;
  readonly line: string;
  readonly tick: string;
}

const BLOCKS: Glyphs = { asked: '▁▂▃▄▅▆▇█', rest: '░', askedCurve: '▂━▀', restCurve: '▁─▔', ruler: '━', point: '▲', left: '◀', right: '▶', line: '─', tick: '┴' };
const ASCII: Glyphs = { asked: '_#', rest: ':', askedCurve: '===', restCurve: '_-"', ruler: '=', point: '^', left: '<', right: '>', line: '-', tick: '+' };

const HALF = 32; // columns on each side of the mean
const SCALES = [8, 6, 5, 4]; // columns a sigma, the first that shows the ends of the part
const DENSITY_ROWS = 6;
const CUMULATIVE_ROWS = 4;
const MARGIN = 6;

/**
 * The density with the part asked for shaded, a ruler that marks the part also where the density is too low to be
 * seen, and the cumulative curve, over one axis in units of the readings. At most 76 columns and 14 lines.
 */
export function oddsPicture(part: Part, { mean, sd }: Normal, utf8: boolean): string[] {
  const glyphs = utf8 ? BLOCKS : ASCII;
  const [from, to] = [(part.from - mean) / sd, (part.to - mean) / sd];
  const farthest = Math.max(...[from, to].filter(Number.isFinite).map(Math.abs), 0);
  const scale = SCALES.find((columns) => HALF / columns >= farthest + 0.25) ?? SCALES[0]!;
  const z = Array.from({ length: 2 * HALF + 1 }, (_, i) => (i - HALF) / scale);
  const asked = z.map((at) => (at >= from && at <= to) !== part.outside);
  return [
    ...caption('density', density(z, asked, glyphs)),
    ' '.repeat(MARGIN) + ruler(z, asked, [from, to], part.outside, glyphs),
    ...caption('share of readings below', cumulative(z, asked, glyphs)),
    ' '.repeat(MARGIN) + z.map((_, i) => ((i - HALF) % scale === 0 ? glyphs.tick : glyphs.line)).join(''),
    ...(mean === 0 && sd === 1 ? [] : [labels(scale, (k) => formatValue(mean + k * sd, sd))]),
    labels(scale, (k) => (k === 0 ? 'mean' : `${k > 0 ? '+' : ''}${k} sd`)),
  ].map((line) => line.trimEnd());
}

function density(z: readonly number[], asked: readonly boolean[], { asked: fillings, rest }: Glyphs): string[] {
  const height = z.map((at) => (pdf(at) / pdf(0)) * DENSITY_ROWS);
  return rows(DENSITY_ROWS, (row) => z.map((_, i) => {
    const filled = height[i]! - row; // of this cell; 1 and more: whole
    if (!asked[i]) return filled >= 0.5 ? rest : ' ';
    const level = Math.min(fillings.length, Math.round(filled * fillings.length));
    return level > 0 ? fillings[level - 1]! : row === 0 && height[i]! > 0.01 ? fillings[0]! : ' ';
  }).join('')).map((line) => ' '.repeat(MARGIN) + line);
}

function cumulative(z: readonly number[], asked: readonly boolean[], { askedCurve, restCurve }: Glyphs): string[] {
  const steps = CUMULATIVE_ROWS * askedCurve.length;
  const names: Record<number, string> = { [CUMULATIVE_ROWS - 1]: '100 %', 0: '0 %' };
  return rows(CUMULATIVE_ROWS, (row) => (names[row] ?? '').padStart(MARGIN - 1) + ' ' + z.map((at, i) => {
    const level = Math.min(steps - 1, Math.floor(cdf(at) * steps)) - row * askedCurve.length;
    return (asked[i] ? askedCurve : restCurve)[level] ?? ' ';
  }).join(''));
}

/** Writes what is drawn into the free upper left corner. */
const caption = (text: string, [top, ...others]: string[]): string[] => [top!.slice(0, MARGIN) + text + top!.slice(MARGIN + text.length), ...others];

/** Lines from the highest row to row 0. */
const rows = (count: number, draw: (row: number) => string): string[] => Array.from({ length: count }, (_, i) => draw(count - 1 - i));

/** Marks the columns of the part; a point where it is narrower than a column; an arrow where it lies or goes on outside the picture. */
function ruler(z: readonly number[], asked: readonly boolean[], [from, to]: readonly [number, number], outside: boolean, glyphs: Glyphs): string {
  const marks = asked.map((is) => (is ? glyphs.ruler : ' '));
  const edge = z.at(-1)!;
  if (outside || from < -edge) marks[0] = glyphs.left;
  if (outside || to > edge) marks[marks.length - 1] = glyphs.right;
  if (!outside && from >= -edge && to <= edge && !asked.includes(true)) {
    const middle = Math.round(((from + to) / 2 + edge) * ((z.length - 1) / 2 / edge));
    marks[middle] = glyphs.point;
  }
  return marks.join('');
}

/** Centres a label under each whole number of sigmas, or under every second or fourth where they would touch. */
function labels(scale: number, name: (sigmas: number) => string): string {
  const widest = Math.floor(HALF / scale);
  for (const stride of [1, 2, 4]) {
    const line = new Array<string>(MARGIN + 2 * HALF + 8).fill(' ');
    let end = -1;
    let fits = true;
    for (let k = -Math.floor(widest / stride) * stride; k <= widest; k += stride) {
      const text = name(k);
      const start = MARGIN + HALF + k * scale - (text.length >> 1);
      fits &&= start > end;
      for (let i = 0; i < text.length && start + i < line.length; i++) line[Math.max(0, start + i)] = text[i]!;
      end = start + text.length;
    }
    if (fits) return line.join('');
  }
  return ' '.repeat(MARGIN + HALF - (name(0).length >> 1)) + name(0);
}
