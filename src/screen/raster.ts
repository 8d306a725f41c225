import { clean } from '../text/clean.js';
import { plainText } from './plain.js';
import type { TerminalProfile } from './terminal.js';

export const OWN = 0x1ff; // the terminal's own colour
export const BOLD = 1;
export const INVERSE = 8;

/** Attributes of a cell as blessed holds them. */
export const attributes = (foreground: number, flags = 0, background = OWN): number => (flags << 18) | (foreground << 9) | background;

export const PLAIN_TEXT = attributes(OWN);

const BITS = [0x01, 0x08, 0x02, 0x10, 0x04, 0x20, 0x40, 0x80]; // of a braille cell, by (row & 3) * 2 + (column & 1)
const rowsOf = (mask: number): number => (mask & 0x09 ? 1 : 0) | (mask & 0x12 ? 2 : 0) | (mask & 0x24 ? 4 : 0) | (mask & 0xc0 ? 8 : 0);
const ASCII_BY_ROWS = [' ', "'", '-', '"', '-', ':', '=', '|', '_', ':', ':', '|', '=', '|', '|', '|'];
const table = (glyph: (mask: number) => string): readonly string[] => Array.from({ length: 256 }, (_, mask) => (mask === 0 ? ' ' : glyph(mask)));

/** Glyphs for the eight dots of a cell, by what the terminal has. */
const GLYPHS: Readonly<Record<TerminalProfile['dots'], readonly string[]>> = {
  braille: table((mask) => String.fromCharCode(0x2800 + mask)),
  block: table((mask) => (mask & 0x1b ? (mask & 0xe4 ? '█' : '▀') : '▄')),
  ascii: table((mask) => ASCII_BY_ROWS[rowsOf(mask)]!),
};

/**
 * A picture of cells: text, and dots at twice the columns and four times the rows. Where things meet, the one of greater
 * weight gives the cell its colour, and a character beats dots of less weight. Nothing is allocated from frame to frame.
 */
export class Raster {
  width = 0;
  height = 0;
  private dots = new Uint8Array(0);
  private attrs = new Int32Array(0);
  private weights = new Uint8Array(0);
  private characters: (string | null)[] = [];
  private glyphs = GLYPHS.braille;

  constructor(readonly kind: TerminalProfile['dots'] = 'braille') {
    this.glyphs = GLYPHS[kind];
  }

  /** Whether dots are fine enough for lines; else readings are drawn as points. */
  get fine(): boolean {
    return this.kind === 'braille';
  }

  resize(width: number, height: number): void {
    if (width === this.width && height === this.height) return;
    this.width = width;
    this.height = height;
    const n = width * height;
    this.dots = new Uint8Array(n);
    this.attrs = new Int32Array(n);
    this.weights = new Uint8Array(n);
    this.characters = new Array<string | null>(n).fill(null);
  }

  clear(): void {
    this.dots.fill(0);
    this.attrs.fill(PLAIN_TEXT);
    this.weights.fill(0);
    this.characters.fill(null);
  }

  /** One dot; x in half columns, y in quarter rows. */
  dot(x: number, y: number, attrs: number, weight: number): void {
    if (x < 0 || y < 0 || x >= this.width * 2 || y >= this.height * 4) return;
    const i = (y >> 2) * this.width + (x >> 1);
    this.dots[i]! |= BITS[((y & 3) << 1) | (x & 1)]!;
    if (weight >= this.weights[i]!) {
      this.weights[i] = weight;
      this.attrs[i] = attrs;
    }
  }

  /** A level line of dots, `on` drawn and `off` left out in turn. */
  level(from: number, to: number, y: number, attrs: number, weight: number, on = 1, off = 0): void {
    for (let x = from; x <= to; x++) if ((x - from) % (on + off) < on) this.dot(x, y, attrs, weight);
  }

  /** An upright line of dots. */
  upright(x: number, from: number, to: number, attrs: number, weight: number): void {
    for (let y = Math.min(from, to); y <= Math.max(from, to); y++) this.dot(x, y, attrs, weight);
  }

  /** A straight line of dots (Bresenham 1965). */
  line(x0: number, y0: number, x1: number, y1: number, attrs: number, weight: number): void {
    const dx = Math.abs(x1 - x0);
    const dy = -Math.abs(y1 - y0);
    let [x, y, error] = [x0, y0, dx + dy];
    for (let steps = dx - dy; steps >= 0; steps--) {
      this.dot(x, y, attrs, weight);
      if (x === x1 && y === y1) return;
      const twice = 2 * error;
      if (twice >= dy) {
        error += dy;
        x += x0 < x1 ? 1 : -1;
      }
      if (twice <= dx) {
        error += dx;
        y += y0 < y1 ? 1 : -1;
      }
    }
  }

  /** One character in a cell. */
  put(column: number, row: number, character: string, attrs: number, weight = 255): void {
    if (column < 0 || row < 0 || column >= this.width || row >= this.height) return;
    const i = row * this.width + column;
    if (weight < this.weights[i]!) return;
    this.characters[i] = character;
    this.attrs[i] = attrs;
    this.weights[i] = weight;
  }

  /** Text from a cell on, cleaned (no text reaches a terminal raw), cut with an ellipsis at `most` characters or at the edge. @returns the column after it */
  text(column: number, row: number, text: string, attrs: number, most = Infinity): number {
    const room = Math.max(0, Math.min(most, this.width - column));
    const safe = clean(text, 500);
    const words = this.kind === 'ascii' ? plainText(safe) : safe;
    const cut = words.length > room;
    const length = cut ? room : words.length;
    for (let i = 0; i < length; i++) this.put(column + i, row, cut && i === length - 1 ? '…' : words[i]!, attrs);
    return column + length;
  }

  /** Empties a rectangle, for what is laid over the picture. */
  wipe(column: number, row: number, width: number, height: number): void {
    for (let y = row; y < row + height; y++) for (let x = column; x < column + width; x++) this.put(x, y, ' ', PLAIN_TEXT);
  }

  glyph(i: number): string {
    return this.characters[i] ?? this.glyphs[this.dots[i]!]!;
  }

  attributesAt(i: number): number {
    return this.attrs[i]!;
  }
}
