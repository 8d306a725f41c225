import { mad, middle } from '../stats/quickselect.js';
import { INTEGERS, PLACES, READINGS, SUMS, VALUE } from './state.js';
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
 * aggregate of a whole block, is taken about the block's own mean.
 *
 * The first block has one place: it is closed by its first reading, so that the very first one needs no anchor.
 */

const AT_VALUE = VALUE;
const RING = READINGS;
// Doubles: sums of the fresh readings; their anchor; readings held, n, and 1 / n(n - 1).
const S1 = SUMS; // of deviations from the anchor
const S2 = SUMS + 1; // of their squares
const S = SUMS + 2; // of the readings themselves
const LOST = SUMS + 3; // what S lost in rounding
const LEAST = SUMS + 4;
const MOST = SUMS + 5;
const ABOUT = SUMS + 6;
const COUNT = SUMS + 7;
const SCALE = SUMS + 8;
// A record of the rest: the same sums.
const R_S1 = 0;
const R_S2 = 1;
const R_S = 2;
const R_LOST = 3;
const R_LEAST = 4;
const R_MOST = 5;
const R_FIELDS = 6;
// Integers: where the next reading goes, its record of the rest, where the block began and where it ends, its number, 1 once the ring is full.
const NEXT = PLACES;
const RECORD = PLACES + 1;
const FIRST = PLACES + 2;
const AFTER = PLACES + 3;
const BLOCK = PLACES + 4;
const FULL = PLACES + 5;
// An aggregate of whole blocks, in doubles. Mean = anchor + offset; the sum is kept to twice the digits of a double.
const N = 0;
const ANCHOR = 1;
const OFFSET = 2;
const M2 = 3;
const SUM = 4;
const CARRY = 5;
const MIN = 6;
const MAX = 7;
const FIELDS = 8;

let scratch = new Float64Array(512); // for order statistics; shared, since they are asked for one at a time

/** Takes the finite reading at hand into the window. @returns whether its block is full: then `closeBlock` is to be called */
export function pushReading(s: Float64Array, c: Int32Array): boolean {
  const x = s[AT_VALUE]!;
  const at = c[NEXT]!;
  const next = at + 1;
  if (c[FULL] === 0) {
    s[COUNT] = next;
    s[SCALE] = 1 / (next * at);
  }
  s[RING + at] = x;
  const d = x - s[ABOUT]!;
  s[S1]! += d;
  s[S2]! += d * d;
  const sum = s[S]!;
  const total = sum + x;
  const part = total - sum;
  s[S] = total;
  s[LOST]! += sum - (total - part) + (x - part); // two-sum; Knuth, The Art of Computer Programming 2, 4.2.2
  if (x < s[LEAST]!) s[LEAST] = x;
  if (x > s[MOST]!) s[MOST] = x;
  c[RECORD]! += R_FIELDS;
  c[NEXT] = next;
  return next === c[AFTER];
}

/**
 * Statistics of the newest `size` readings. Taking one and asking cost the same at every reading and allocate nothing.
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
   * @param s doubles of the channel: those of the window begin at READINGS
   * @param c integers of the channel
   */
  constructor(
    readonly size: number,
    private readonly s: Float64Array = new Float64Array(READINGS + size),
    private readonly c: Int32Array = new Int32Array(INTEGERS),
  ) {
    this.blockSize = Math.max(1, Math.min(Math.round(1.2 * Math.sqrt(size)), size - 3));
    this.blocks = new Float64Array((1 + Math.ceil((size - 1) / this.blockSize)) * FIELDS);
    this.rest = new Float64Array(this.blockSize * R_FIELDS);
    s[LEAST] = Infinity;
    s[MOST] = -Infinity;
    s[SCALE] = NaN;
    this.rest[R_LEAST] = Infinity;
    this.rest[R_MOST] = -Infinity;
    c[AFTER] = 1;
  }

  get length(): number {
    return this.s[COUNT]!;
  }

  /** Takes a finite reading. */
  take(x: number): void {
    this.s[AT_VALUE] = x;
    if (pushReading(this.s, this.c)) this.closeBlock();
  }

  /** Mean; NaN before the first reading. */
  mean(): number {
    const { s, rest } = this;
    const record = this.c[RECORD]!;
    const a = s[S]!;
    const b = rest[record + R_S]!;
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

  /** Puts the block just written away and opens the next one. To be called when `pushReading` says so. */
  closeBlock(): void {
    const { c, blocks, back, size } = this;
    const base = c[BLOCK]! * FIELDS;
    this.summarise(base);
    if (c[AFTER]! < size) {
      join(back, 0, blocks, base);
      c[BLOCK]!++;
    } else {
      // A lap is done: each of its blocks takes in all that follow it, for the middles of the next lap.
      for (let b = blocks.length - 2 * FIELDS; b >= 0; b -= FIELDS) join(blocks, b, blocks, b + FIELDS);
      back[N] = 0;
      c[BLOCK] = 0;
      c[NEXT] = 0;
      c[FULL] = 1;
    }
    c[FIRST] = c[NEXT]!;
    c[AFTER] = c[BLOCK] === 0 ? 1 : Math.min(c[NEXT]! + this.blockSize, size);
    c[RECORD] = 0;
    this.openBlock();
  }

  /** The aggregate of the block just written. */
  private summarise(base: number): void {
    const { s, c, blocks } = this;
    const first = RING + c[FIRST]!;
    const after = RING + c[AFTER]!;
    const n = after - first;
    const anchor = s[S]! / n;
    let s1 = 0;
    let s2 = 0;
    let least = Infinity;
    let most = -Infinity;
    for (let i = first; i < after; i++) {
      const x = s[i]!;
      const d = x - anchor;
      s1 += d;
      s2 += d * d;
      if (x < least) least = x;
      if (x > most) most = x;
    }
    blocks[base + N] = n;
    blocks[base + ANCHOR] = anchor;
    blocks[base + OFFSET] = s1 / n;
    blocks[base + M2] = Math.max(0, s2 - (s1 * s1) / n);
    blocks[base + SUM] = s[S]!;
    blocks[base + CARRY] = s[LOST]!;
    blocks[base + MIN] = least;
    blocks[base + MAX] = most;
  }

  /** A reading that outlasts the block about to be written: the middle one of the newest three, so that it is no lone outlier. */
  private anchor(): number {
    const { s, size } = this;
    const last = this.c[FIRST]! + size - 1;
    const a = s[RING + (last % size)]!;
    if (this.length < 3 || size < 4) return a;
    const b = s[RING + ((last - 1) % size)]!;
    const c = s[RING + ((last - 2) % size)]!;
    return Math.max(Math.min(a, b), Math.min(Math.max(a, b), c));
  }

  /** Makes `rest` for the block that is about to be written, while its old readings still stand. */
  private openBlock(): void {
    const { s, c, rest, middle, back, blocks } = this;
    const first = RING + c[FIRST]!;
    const after = RING + c[AFTER]!;
    const full = c[FULL] === 1;
    const anchor = this.anchor();
    middle[N] = 0;
    const next = (c[BLOCK]! + 1) * FIELDS;
    if (full && next < blocks.length) join(middle, 0, blocks, next);
    if (back[N]! > 0) join(middle, 0, back, 0);
    const n = middle[N]; // never 0: a block is shorter than the window
    const apart = middle[ANCHOR]! - anchor + middle[OFFSET]!;
    let s1 = n * apart;
    let s2 = middle[M2]! + s1 * apart;
    let sum = middle[SUM]!;
    let lost = middle[CARRY]!;
    let least = middle[MIN]!;
    let most = middle[MAX]!;
    s[S1] = 0;
    s[S2] = 0;
    s[S] = 0;
    s[LOST] = 0;
    s[LEAST] = least; // the middle stays in the window as long as the block is written: few readings pass its extremes
    s[MOST] = most;
    s[ABOUT] = anchor;
    // In the first lap there is no old block: then every record is the middle.
    for (let i = after - 1; i >= first; i--) {
      if (full) {
        const x = s[i]!;
        const d = x - anchor;
        s1 += d;
        s2 += d * d;
        const total = sum + x;
        lost += roundingError(sum, x, total);
        sum = total;
        if (x < least) least = x;
        if (x > most) most = x;
      }
      const record = (i - first) * R_FIELDS;
      rest[record + R_S1] = s1;
      rest[record + R_S2] = s2;
      rest[record + R_S] = sum;
      rest[record + R_LOST] = lost;
      rest[record + R_LEAST] = least;
      rest[record + R_MOST] = most;
    }
  }

  /** Copies the newest `min(length, out.length)` readings, oldest first. @returns how many */
  copy(out: Float64Array): number {
    const { s, size } = this;
    const ring = s.subarray(RING, RING + size);
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
  const na = a[at + N]!;
  if (na === 0) {
    for (let field = 0; field < FIELDS; field++) a[at + field] = b[bt + field]!;
    return;
  }
  const nb = b[bt + N]!;
  const n = na + nb;
  const anchor = b[bt + ANCHOR]!;
  const ma = a[at + ANCHOR]! - anchor + a[at + OFFSET]!;
  const mb = b[bt + OFFSET]!;
  a[at + M2]! += b[bt + M2]! + (ma - mb) * (ma - mb) * ((na * nb) / n);
  a[at + N] = n;
  a[at + ANCHOR] = anchor;
  a[at + OFFSET] = (na * ma + nb * mb) / n;
  const sum = a[at + SUM]!;
  const x = b[bt + SUM]!;
  const total = sum + x;
  a[at + CARRY]! += roundingError(sum, x, total) + b[bt + CARRY]!;
  a[at + SUM] = total;
  a[at + MIN] = Math.min(a[at + MIN]!, b[bt + MIN]!);
  a[at + MAX] = Math.max(a[at + MAX]!, b[bt + MAX]!);
}
