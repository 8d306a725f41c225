import { mad, middle } from '../stats/quickselect.js';
import * as state from './state.js';
import { ANCHOR, BLOCK, BLOCK_BEGIN, BLOCK_END, FULL, NEXT } from './state.js';
import type { WindowStatistics } from './window.js';

/*
 * The ring is cut into blocks of about sqrt(window) places. At any time each reading lies in one of three pieces:
 *   fresh   this lap's readings in the block being written, as running sums
 *   old     what is left of the oldest block, which is the one being overwritten
 *   middle  all the other blocks
 * When a block is opened, `rest` is made: for each number of fresh readings, the sums of old and middle together. A query
 * adds two records. Nothing is ever subtracted from a sum, so that nothing drifts and an outlier leaves no trace.
 *
 * Fresh and rest sum deviations from one anchor, a reading that stays in the window as long as the block is written. With
 * a summed reading as anchor, S2 - S1^2 / n loses at most a factor n of the last place. What is kept beyond that time, the
 * aggregate of a whole block, is summed once more about the block's own mean where the anchor was far from it.
 *
 * The first block has one place: it is closed by its first reading, so that the very first one needs no anchor.
 */

// Constants of this file, see state.ts: mean and sd are asked for at each reading.
const { READINGS, S1, S2, SUM, LOST, LEAST, MOST, COUNT, SCALE, RECORD, RECORD_FIELDS } = state;
// A record of the rest: the same sums as of the fresh readings.
const R_S1 = 0;
const R_S2 = 1;
const R_SUM = 2;
const R_LOST = 3;
const R_LEAST = 4;
const R_MOST = 5;
// An aggregate of whole blocks, in doubles. Mean = anchor + offset; the sum is kept to twice the digits of a double.
const A_N = 0;
const A_ANCHOR = 1;
const A_OFFSET = 2;
const A_M2 = 3;
const A_SUM = 4;
const A_LOST = 5;
const A_LEAST = 6;
const A_MOST = 7;
const FIELDS = 8;
/** Share of S2 that must be left in S2 - S1^2 / n: less, and more than five bits are lost. */
const ENOUGH = 1 / 32;

let scratch = new Float64Array(512); // for order statistics; shared, since they are asked for one at a time

/**
 * Statistics of the newest `size` readings, which the quiet path takes in. Taking and asking cost the same at every reading and allocate nothing.
 * Blocks are joined after Chan, Golub and LeVeque, The American Statistician 37(3), 1983; sums are compensated. Readings
 * may be anything whose square is finite (below 1e154): one beyond that leaves sd NaN or infinite while it is in the window.
 */
export class RollingWindow {
  private readonly blocks: Float64Array;
  private readonly rest: Float64Array;
  private readonly back = new Float64Array(FIELDS);
  private readonly middle = new Float64Array(FIELDS);
  private readonly blockSize: number;

  /**
   * @param size readings in the window, at least 2
   * @param s doubles of the channel, c its integers
   */
  constructor(
    readonly size: number,
    private readonly s: Float64Array,
    private readonly c: Int32Array,
  ) {
    this.blockSize = Math.max(1, Math.min(Math.round(1.4 * Math.sqrt(size)), size - 3));
    this.blocks = new Float64Array((1 + Math.ceil((size - 1) / this.blockSize)) * FIELDS);
    this.rest = new Float64Array(this.blockSize * RECORD_FIELDS);
    s[LEAST] = Infinity;
    s[MOST] = -Infinity;
    s[SCALE] = NaN;
    this.rest[R_LEAST] = Infinity;
    this.rest[R_MOST] = -Infinity;
    c[BLOCK_END] = 1;
  }

  get length(): number {
    return this.s[COUNT]!;
  }

  /** Mean; NaN before the first reading. */
  mean(): number {
    const { s, rest } = this;
    const record = this.c[RECORD]!;
    const a = s[SUM]!;
    const b = rest[record + R_SUM]!;
    const total = a + b;
    const part = total - a;
    return (total + (a - (total - part) + (b - part) + (s[LOST]! + rest[record + R_LOST]!))) / s[COUNT]!;
  }

  /** Sample standard deviation (n - 1); NaN for fewer than two readings. */
  sd(): number {
    const { s, rest } = this;
    const record = this.c[RECORD]!;
    const s1 = s[S1]! + rest[record + R_S1]!;
    const s2 = s[S2]! + rest[record + R_S2]!;
    return Math.sqrt(Math.max(0, s[COUNT]! * s2 - s1 * s1) * s[SCALE]!);
  }

  min(): number {
    return this.length === 0 ? NaN : Math.min(this.s[LEAST]!, this.rest[this.c[RECORD]! + R_LEAST]!);
  }

  max(): number {
    return this.length === 0 ? NaN : Math.max(this.s[MOST]!, this.rest[this.c[RECORD]! + R_MOST]!);
  }

  /** Puts the block just written away and opens the next one. To be called as soon as the quiet path says that it is full. */
  closeBlock(): void {
    const { c, blocks, back, size } = this;
    const base = c[BLOCK]! * FIELDS;
    this.summarise(base);
    if (c[BLOCK_END]! < size) {
      join(back, 0, blocks, base);
      c[BLOCK]!++;
    } else {
      // A lap is done: each of its blocks takes in all that follow it, for the middles of the next lap.
      for (let b = blocks.length - 2 * FIELDS; b >= 0; b -= FIELDS) join(blocks, b, blocks, b + FIELDS);
      back[A_N] = 0;
      c[BLOCK] = 0;
      c[NEXT] = 0;
      c[FULL] = 1;
    }
    c[BLOCK_BEGIN] = c[NEXT]!;
    c[BLOCK_END] = c[BLOCK] === 0 ? 1 : Math.min(c[NEXT]! + this.blockSize, size);
    c[RECORD] = 0;
    this.openBlock();
  }

  /** The aggregate of the block just written, from its sums where these do. */
  private summarise(base: number): void {
    const { s, c, blocks } = this;
    const n = c[BLOCK_END]! - c[BLOCK_BEGIN]!;
    const s1 = s[S1]!;
    const s2 = s[S2]!;
    const m2 = s2 - (s1 * s1) / n;
    blocks[base + A_N] = n;
    blocks[base + A_ANCHOR] = s[ANCHOR]!;
    blocks[base + A_OFFSET] = s1 / n;
    blocks[base + A_M2] = m2;
    blocks[base + A_SUM] = s[SUM]!;
    blocks[base + A_LOST] = s[LOST]!;
    blocks[base + A_LEAST] = s[LEAST]!;
    blocks[base + A_MOST] = s[MOST]!;
    if (!(m2 > s2 * ENOUGH)) this.resum(base);
  }

  /** Deviations once more, about the block's own mean: the anchor was so far from it that the difference lost digits. */
  private resum(base: number): void {
    const { s, c, blocks } = this;
    const n = blocks[base + A_N]!;
    const anchor = s[SUM]! / n;
    let s1 = 0;
    let s2 = 0;
    for (let i = READINGS + c[BLOCK_BEGIN]!; i < READINGS + c[BLOCK_END]!; i++) {
      const d = s[i]! - anchor;
      s1 += d;
      s2 += d * d;
    }
    blocks[base + A_ANCHOR] = anchor;
    blocks[base + A_OFFSET] = s1 / n;
    blocks[base + A_M2] = Math.max(0, s2 - (s1 * s1) / n);
  }

  /** A reading that outlasts the block about to be written: the middle one of the newest three, so that it is no lone outlier. */
  private anchor(): number {
    const { s, size } = this;
    const last = this.c[BLOCK_BEGIN]! + size - 1;
    const a = s[READINGS + (last % size)]!;
    if (this.length < 3 || size < 4) return a;
    const b = s[READINGS + ((last - 1) % size)]!;
    const c = s[READINGS + ((last - 2) % size)]!;
    return Math.max(Math.min(a, b), Math.min(Math.max(a, b), c));
  }

  /** Makes `rest` for the block that is about to be written, while its old readings still stand. */
  private openBlock(): void {
    const { s, c, rest, middle, back, blocks } = this;
    const first = READINGS + c[BLOCK_BEGIN]!;
    const after = READINGS + c[BLOCK_END]!;
    const full = c[FULL] === 1;
    const anchor = this.anchor();
    middle[A_N] = 0;
    const next = (c[BLOCK]! + 1) * FIELDS;
    if (full && next < blocks.length) join(middle, 0, blocks, next);
    if (back[A_N]! > 0) join(middle, 0, back, 0);
    const n = middle[A_N]; // never 0: a block is shorter than the window
    const apart = middle[A_ANCHOR]! - anchor + middle[A_OFFSET]!;
    let s1 = n * apart;
    let s2 = middle[A_M2]! + s1 * apart;
    let sum = middle[A_SUM]!;
    let lost = middle[A_LOST]!;
    let least = middle[A_LEAST]!;
    let most = middle[A_MOST]!;
    s[S1] = 0;
    s[S2] = 0;
    s[SUM] = 0;
    s[LOST] = 0;
    s[LEAST] = Infinity;
    s[MOST] = -Infinity;
    s[ANCHOR] = anchor;
    let record = (after - first) * RECORD_FIELDS;
    for (let i = after - 1; i >= first; i--) {
      if (full) {
        const x = s[i]!;
        const d = x - anchor;
        const total = sum + x;
        const part = total - sum;
        s1 += d;
        s2 += d * d;
        lost += sum - (total - part) + (x - part);
        sum = total;
        if (x < least) least = x;
        if (x > most) most = x;
      } // in the first lap there is no old block: then every record is the middle
      record = (record - RECORD_FIELDS) | 0;
      rest[record] = s1; // R_S1
      rest[(record + R_S2) | 0] = s2;
      rest[(record + R_SUM) | 0] = sum;
      rest[(record + R_LOST) | 0] = lost;
      rest[(record + R_LEAST) | 0] = least;
      rest[(record + R_MOST) | 0] = most;
    }
  }

  /** Copies the newest `min(length, out.length)` readings, oldest first. @returns how many */
  copy(out: Float64Array): number {
    const { s, size } = this;
    const ring = s.subarray(READINGS, READINGS + size);
    const n = Math.min(this.length, out.length);
    const from = (this.c[NEXT]! - n + size) % size;
    const head = Math.min(n, size - from);
    out.set(ring.subarray(from, from + head));
    out.set(ring.subarray(0, n - head), head);
    return n;
  }

  /** All statistics, order statistics included: linear in the window, so asked for by people and not at each reading. */
  statistics(): WindowStatistics {
    const n = this.length;
    if (scratch.length < n) scratch = new Float64Array(n);
    this.copy(scratch);
    const pair = middle(scratch, n);
    return {
      n,
      mean: this.mean(),
      sd: this.sd(),
      median: pair[0] / 2 + pair[1] / 2,
      mad: mad(scratch, n, pair),
      min: this.min(),
      max: this.max(),
    };
  }

  /**
   * Lag-1 autocorrelation of the window, r1 = sum (x_i - m)(x_i+1 - m) / sum (x_i - m)^2 (Box and Jenkins); NaN for
   * fewer than three readings or no spread. Linear in the window.
   */
  lag1(): number {
    const n = this.length;
    if (n < 3) return NaN;
    if (scratch.length < n) scratch = new Float64Array(n);
    this.copy(scratch);
    const mean = this.mean();
    let before = scratch[0]! - mean;
    let products = 0;
    let squares = before * before;
    for (let i = 1; i < n; i++) {
      const d = scratch[i]! - mean;
      products += before * d;
      squares += d * d;
      before = d;
    }
    return squares > 0 ? products / squares : NaN;
  }

  /** The arrays of the window alone, for snapshots; with those of the channel written back they restore it. */
  arrays(): Readonly<Record<string, Float64Array>> {
    return { blocks: this.blocks, rest: this.rest, back: this.back };
  }
}

/** What a + b = total lost in rounding (two-sum; Knuth, The Art of Computer Programming 2, 4.2.2). */
function roundingError(a: number, b: number, total: number): number {
  const part = total - a;
  return a - (total - part) + (b - part);
}

/** Joins aggregate `b` into aggregate `a`, which may be empty. The result keeps b's anchor. */
function join(a: Float64Array, at: number, b: Float64Array, bt: number): void {
  const na = a[at + A_N]!;
  if (na === 0) {
    for (let field = 0; field < FIELDS; field++) a[at + field] = b[bt + field]!;
    return;
  }
  const nb = b[bt + A_N]!;
  const n = na + nb;
  const anchor = b[bt + A_ANCHOR]!;
  const ma = a[at + A_ANCHOR]! - anchor + a[at + A_OFFSET]!;
  const mb = b[bt + A_OFFSET]!;
  a[at + A_M2]! += b[bt + A_M2]! + (ma - mb) * (ma - mb) * ((na * nb) / n);
  a[at + A_N] = n;
  a[at + A_ANCHOR] = anchor;
  a[at + A_OFFSET] = (na * ma + nb * mb) / n;
  const sum = a[at + A_SUM]!;
  const x = b[bt + A_SUM]!;
  const total = sum + x;
  a[at + A_LOST]! += roundingError(sum, x, total) + b[bt + A_LOST]!;
  a[at + A_SUM] = total;
  a[at + A_LEAST] = Math.min(a[at + A_LEAST]!, b[bt + A_LEAST]!);
  a[at + A_MOST] = Math.max(a[at + A_MOST]!, b[bt + A_MOST]!);
}
