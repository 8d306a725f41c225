import { mad, middle } from '../stats/quickselect.js';
import * as state from './state.js';
import { ANCHOR, BLOCK, BLOCK_BEGIN, BLOCK_END, FLOOR, FRESH_LEAST, FRESH_LOST, FRESH_MOST, FRESH_S1, FRESH_S2, FRESH_SUM } from './state.js';
import { FULL, NEXT, OLD_EXTREME } from './state.js';
import type { WindowStatistics } from './window.js';

/*
 * The window keeps sums, and the quiet path adds to them the reading that comes and takes off the one that goes. Left
 * alone, such sums drift, and are worthless after an outlier has gone. So they are made anew, from parts of which nothing
 * was ever taken off, every block of readings: the ring is cut into blocks of a few times sqrt(window) places, and at any
 * time each reading lies in one of three pieces:
 *   fresh    this lap's readings in the block being written, with sums of their own
 *   old      what is left of the oldest block, which is the one being overwritten
 *   middle   all the other blocks, as one aggregate
 * Between, rounding errors of one block's readings are all there is. They are counted in last places of the largest sum
 * of squares since, so the sums are also made anew as soon as that sum has fallen to a sixteenth (FLOOR): an outlier
 * leaves no trace. Only readings that were there when the sums were made can go before they are made anew.
 *
 * Deviations are taken from an anchor, a reading that stays in the window as long as the block is written. With a summed
 * reading as anchor, S2 - S1^2 / n loses at most a factor n of the last place. What is kept beyond that time, the
 * aggregate of a whole block, is summed once more about the block's own mean where the anchor was far from it.
 *
 * The first block has one place: it is closed by its first reading, so that the very first one needs no anchor.
 */

// Constants of this file, see state.ts: mean and sd are asked for at each reading.
const { READINGS, S1, S2, SUM, LOST, COUNT, SCALE } = state;
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
const MAY_FALL_TO = 1 / 16;

let scratch = new Float64Array(512); // for order statistics; shared, since they are asked for one at a time

/**
 * Statistics of the newest `size` readings, which the quiet path takes in. Taking and asking cost the same at every reading
 * and allocate nothing. Blocks are joined after Chan, Golub and LeVeque, The American Statistician 37(3), 1983; sums are
 * compensated. Readings may be anything whose square is finite (below 1e154): one beyond that leaves sd NaN or infinite
 * while it is in the window.
 */
export class RollingWindow {
  /** Each block as it was last written. */
  private readonly own: Float64Array;
  /** Each block of the lap before together with all that follow it. */
  private readonly suffixes: Float64Array;
  private readonly back = new Float64Array(FIELDS);
  private readonly middle = new Float64Array(FIELDS);
  /** Where the old block holds an extreme: the place of the extreme from each of its places on; -1: in the middle. */
  private readonly oldLeast: Int32Array;
  private readonly oldMost: Int32Array;
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
    this.blockSize = Math.max(1, Math.min(Math.round(4.5 * Math.sqrt(size)), size >> 2));
    this.own = new Float64Array((1 + Math.ceil((size - 1) / this.blockSize)) * FIELDS);
    this.suffixes = new Float64Array(this.own.length);
    this.oldLeast = new Int32Array(this.blockSize);
    this.oldMost = new Int32Array(this.blockSize);
    this.middle[A_LEAST] = Infinity;
    this.middle[A_MOST] = -Infinity;
    s[FRESH_LEAST] = Infinity;
    s[FRESH_MOST] = -Infinity;
    s[SCALE] = NaN;
    c[BLOCK_END] = 1;
  }

  get length(): number {
    return this.s[COUNT]!;
  }

  /** Mean; NaN before the first reading. */
  mean(): number {
    const { s } = this;
    return (s[SUM]! + s[LOST]!) / s[COUNT]!;
  }

  /** Sample standard deviation (n - 1); NaN for fewer than two readings. */
  sd(): number {
    const { s } = this;
    const s1 = s[S1]!;
    return Math.sqrt(Math.max(0, s[COUNT]! * s[S2]! - s1 * s1) * s[SCALE]!);
  }

  /** Least reading; NaN before the first. */
  min(): number {
    return this.length === 0 ? NaN : Math.min(this.s[FRESH_LEAST]!, this.extremeOfRest(this.oldLeast, A_LEAST));
  }

  /** Greatest reading; NaN before the first. */
  max(): number {
    return this.length === 0 ? NaN : Math.max(this.s[FRESH_MOST]!, this.extremeOfRest(this.oldMost, A_MOST));
  }

  private extremeOfRest(places: Int32Array, ofMiddle: number): number {
    const { s, c } = this;
    const place = c[OLD_EXTREME] === 1 ? places[c[NEXT]! - c[BLOCK_BEGIN]!]! : -1;
    return place < 0 ? this.middle[ofMiddle]! : s[READINGS + place]!;
  }

  /** What must be done after a reading of which the quiet path says so: its block is full, or the sums have fallen too far. */
  attend(): void {
    const { s, c } = this;
    if (c[NEXT] === c[BLOCK_END]) this.nextBlock();
    else this.sumAnew();
    s[FLOOR] = s[S2]! * MAY_FALL_TO;
  }

  /** Puts the block just written away and opens the next one, with sums from the aggregates. */
  private nextBlock(): void {
    const { s, c, own, suffixes, back, middle, size } = this;
    this.summarise(c[BLOCK]! * FIELDS);
    if (c[BLOCK_END]! < size) {
      join(back, 0, own, c[BLOCK]! * FIELDS);
      c[BLOCK]!++;
    } else {
      suffixes.set(own);
      for (let b = own.length - 2 * FIELDS; b >= 0; b -= FIELDS) join(suffixes, b, suffixes, b + FIELDS);
      back[A_N] = 0;
      c[BLOCK] = 0;
      c[NEXT] = 0;
      c[FULL] = 1;
    }
    c[BLOCK_BEGIN] = c[NEXT]!;
    c[BLOCK_END] = c[BLOCK] === 0 ? 1 : Math.min(c[NEXT]! + this.blockSize, size);
    const old = c[BLOCK]! * FIELDS;
    middle[A_N] = 0;
    if (c[FULL] === 1 && old + FIELDS < own.length) join(middle, 0, suffixes, old + FIELDS);
    if (back[A_N]! > 0) join(middle, 0, back, 0);

    this.clear();
    s[FRESH_SUM] = 0;
    s[FRESH_LOST] = 0;
    s[FRESH_LEAST] = Infinity;
    s[FRESH_MOST] = -Infinity;
    this.add(middle, 0);
    c[OLD_EXTREME] = 0;
    if (c[FULL] === 0) return;
    this.add(own, old);
    if (own[old + A_LEAST]! < middle[A_LEAST]! || own[old + A_MOST]! > middle[A_MOST]!) this.findOldExtremes();
  }

  /** Sums of nothing, about a new anchor. */
  private clear(): void {
    const { s } = this;
    this.setAnchor();
    s[S1] = 0;
    s[S2] = 0;
    s[SUM] = 0;
    s[LOST] = 0;
    s[FRESH_S1] = 0;
    s[FRESH_S2] = 0;
  }

  /** Adds an aggregate, which may be empty, to the sums. */
  private add(aggregate: Float64Array, at: number): void {
    const { s } = this;
    const n = aggregate[at + A_N]!;
    if (n === 0) return;
    const apart = aggregate[at + A_ANCHOR]! - s[ANCHOR]! + aggregate[at + A_OFFSET]!;
    s[S1]! += n * apart;
    s[S2]! += aggregate[at + A_M2]! + n * apart * apart;
    const sum = s[SUM]!;
    const x = aggregate[at + A_SUM]!;
    s[SUM] = sum + x;
    s[LOST]! += roundingError(sum, x, sum + x) + aggregate[at + A_LOST]!;
  }

  /** Sums of the readings that fresh and old hold now, and of the middle. */
  private sumAnew(): void {
    const { s, c } = this;
    this.clear();
    const anchor = s[ANCHOR]!;
    const next = READINGS + c[NEXT]!;
    for (let i = READINGS + c[BLOCK_BEGIN]!; i < next; i++) {
      const d = s[i]! - anchor;
      s[FRESH_S1]! += d;
      s[FRESH_S2]! += d * d;
    }
    s[S1] = s[FRESH_S1]!;
    s[S2] = s[FRESH_S2]!;
    s[SUM] = s[FRESH_SUM]!;
    s[LOST] = s[FRESH_LOST]!;
    const end = c[FULL] === 1 ? READINGS + c[BLOCK_END]! : next;
    for (let i = next; i < end; i++) {
      const x = s[i]!;
      const d = x - anchor;
      s[S1] += d;
      s[S2] += d * d;
      const sum: number = s[SUM];
      s[SUM] = sum + x;
      s[LOST] += roundingError(sum, x, sum + x);
    }
    this.add(this.middle, 0);
  }

  /** The aggregate of the block just written, from its sums where these do. */
  private summarise(base: number): void {
    const { s, c, own } = this;
    const n = c[BLOCK_END]! - c[BLOCK_BEGIN]!;
    const s1 = s[FRESH_S1]!;
    const s2 = s[FRESH_S2]!;
    const m2 = s2 - (s1 * s1) / n;
    own[base + A_N] = n;
    own[base + A_ANCHOR] = s[ANCHOR]!;
    own[base + A_OFFSET] = s1 / n;
    own[base + A_M2] = m2;
    own[base + A_SUM] = s[FRESH_SUM]!;
    own[base + A_LOST] = s[FRESH_LOST]!;
    own[base + A_LEAST] = s[FRESH_LEAST]!;
    own[base + A_MOST] = s[FRESH_MOST]!;
    if (!(m2 > s2 * ENOUGH)) this.sumBlockAnew(base);
  }

  /** Deviations once more, about the block's own mean: the anchor was so far from it that the difference lost digits. */
  private sumBlockAnew(base: number): void {
    const { s, c, own } = this;
    const n = own[base + A_N]!;
    const anchor = s[FRESH_SUM]! / n;
    let s1 = 0;
    let s2 = 0;
    for (let i = READINGS + c[BLOCK_BEGIN]!; i < READINGS + c[BLOCK_END]!; i++) {
      const d = s[i]! - anchor;
      s1 += d;
      s2 += d * d;
    }
    own[base + A_ANCHOR] = anchor;
    own[base + A_OFFSET] = s1 / n;
    own[base + A_M2] = Math.max(0, s2 - (s1 * s1) / n);
  }

  /** Where the extremes of the block about to be overwritten are, from each of its places on. */
  private findOldExtremes(): void {
    const { s, c, middle, oldLeast, oldMost } = this;
    c[OLD_EXTREME] = 1;
    const first = c[BLOCK_BEGIN]!;
    let least = middle[A_LEAST]!;
    let most = middle[A_MOST]!;
    let leastAt = -1;
    let mostAt = -1;
    for (let place = c[BLOCK_END]! - 1; place >= first; place--) {
      const x = s[READINGS + place]!;
      if (x < least) {
        least = x;
        leastAt = place;
      }
      if (x > most) {
        most = x;
        mostAt = place;
      }
      oldLeast[place - first] = leastAt;
      oldMost[place - first] = mostAt;
    }
  }

  /** The anchor: a reading that outlasts the block being written, the middle one of the newest three, so that it is no lone outlier. */
  private setAnchor(): void {
    const { s, c, size } = this;
    const last = c[NEXT]! + size - 1;
    const x = s[READINGS + (last % size)]!;
    s[ANCHOR] = x;
    if (this.length < 3 || size < 4) return;
    const y = s[READINGS + ((last - 1) % size)]!;
    const z = s[READINGS + ((last - 2) % size)]!;
    s[ANCHOR] = Math.max(Math.min(x, y), Math.min(Math.max(x, y), z));
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
  arrays(): Readonly<Record<string, Float64Array | Int32Array>> {
    return { own: this.own, suffixes: this.suffixes, back: this.back, middle: this.middle, oldLeast: this.oldLeast, oldMost: this.oldMost };
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
