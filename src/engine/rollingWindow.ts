import { mad, middle } from '../stats/quickselect.js';
import { VALUE } from './hand.js';
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
 */

const AT_VALUE = VALUE;
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
// A record of sums: of the fresh readings (with their anchor behind it), or of the rest.
const S1 = 0; // of deviations from the anchor
const S2 = 1; // of their squares
const S = 2; // of the readings themselves
const LOST = 3; // what S lost in rounding
const LEAST = 4;
const MOST = 5;
const SUMS = 6;
const ABOUT = SUMS;
// Places: where the next reading goes, its record of the rest, where the block began and where it ends, its number, 1 once the ring is full.
const NEXT = 0;
const RECORD = 1;
const FIRST = 2;
const AFTER = 3;
const BLOCK = 4;
const FULL = 5;
const PLACES = 6;

let scratch = new Float64Array(512); // for order statistics; shared, since they are asked for one at a time

/**
 * Statistics of the newest `size` readings. Pushing and asking cost the same at every reading and allocate nothing.
 * Blocks are joined after Chan, Golub and LeVeque, The American Statistician 37(3), 1983; sums are compensated. Readings
 * may be anything whose square is finite (below 1e154): one beyond that leaves sd NaN or infinite while it is in the window.
 */
export class RollingWindow {
  private readonly values: Float64Array;
  private readonly blocks: Float64Array;
  private readonly rest: Float64Array;
  private readonly fresh = new Float64Array(SUMS + 1);
  private readonly back = new Float64Array(FIELDS);
  private readonly middle = new Float64Array(FIELDS);
  private readonly place = new Int32Array(PLACES);
  private readonly blockSize: number;

  /**
   * @param size readings in the window, at least 2
   * @param hand the reading at hand, whose value `push` takes
   */
  constructor(
    readonly size: number,
    private readonly hand: Float64Array,
  ) {
    this.blockSize = Math.min(Math.round(1.4 * Math.sqrt(size)), size - 1); // the newest reading before a block outlasts it
    this.values = new Float64Array(size);
    this.blocks = new Float64Array(Math.ceil(size / this.blockSize) * FIELDS);
    this.rest = new Float64Array(this.blockSize * SUMS);
    for (let record = 0; record < this.rest.length; record += SUMS) {
      this.rest[record + LEAST] = Infinity;
      this.rest[record + MOST] = -Infinity;
    }
    this.fresh[LEAST] = Infinity;
    this.fresh[MOST] = -Infinity;
    this.place[AFTER] = this.blockSize;
  }

  get length(): number {
    return this.place[FULL] === 1 ? this.size : this.place[NEXT]!;
  }

  /** Takes the finite reading in hand. */
  push(): void {
    const { place, fresh } = this;
    const x = this.hand[AT_VALUE]!;
    const at = place[NEXT]!;
    if (at === 0 && place[FULL] === 0) fresh[ABOUT] = x;
    this.values[at] = x;
    const d = x - fresh[ABOUT]!;
    fresh[S1]! += d;
    fresh[S2]! += d * d;
    const sum = fresh[S]!;
    const total = sum + x;
    const part = total - sum;
    fresh[S] = total;
    fresh[LOST]! += sum - (total - part) + (x - part); // two-sum; Knuth, The Art of Computer Programming 2, 4.2.2
    if (x < fresh[LEAST]!) fresh[LEAST] = x;
    if (x > fresh[MOST]!) fresh[MOST] = x;
    place[RECORD]! += SUMS;
    place[NEXT] = at + 1;
    if (at + 1 === place[AFTER]) this.closeBlock();
  }

  /** Mean; NaN before the first reading. */
  mean(): number {
    const { fresh, rest } = this;
    const record = this.place[RECORD]!;
    const a = fresh[S]!;
    const b = rest[record + S]!;
    const total = a + b;
    const part = total - a;
    const lost = a - (total - part) + (b - part) + fresh[LOST]! + rest[record + LOST]!;
    return (total + lost) / this.length;
  }

  /** Sample standard deviation (n - 1); NaN for fewer than two readings. */
  sd(): number {
    const { fresh, rest } = this;
    const record = this.place[RECORD]!;
    const n = this.length;
    const s1 = fresh[S1]! + rest[record + S1]!;
    const s2 = fresh[S2]! + rest[record + S2]!;
    return Math.sqrt(Math.max(0, n * s2 - s1 * s1) / (n * (n - 1)));
  }

  min(): number {
    return this.length === 0 ? NaN : Math.min(this.fresh[LEAST]!, this.rest[this.place[RECORD]! + LEAST]!);
  }

  max(): number {
    return this.length === 0 ? NaN : Math.max(this.fresh[MOST]!, this.rest[this.place[RECORD]! + MOST]!);
  }

  private closeBlock(): void {
    const { place, blocks, back, size } = this;
    const base = place[BLOCK]! * FIELDS;
    this.summarise(base);
    if (place[AFTER]! < size) {
      join(back, 0, blocks, base);
      place[BLOCK]!++;
    } else {
      // A lap is done: each of its blocks takes in all that follow it, for the middles of the next lap.
      for (let b = blocks.length - 2 * FIELDS; b >= 0; b -= FIELDS) join(blocks, b, blocks, b + FIELDS);
      back[N] = 0;
      place[BLOCK] = 0;
      place[NEXT] = 0;
      place[FULL] = 1;
    }
    place[FIRST] = place[NEXT]!;
    place[AFTER] = Math.min(place[NEXT]! + this.blockSize, size);
    place[RECORD] = 0;
    this.openBlock();
  }

  /** The aggregate of the block just written. */
  private summarise(base: number): void {
    const { place, fresh, blocks, values } = this;
    const first = place[FIRST]!;
    const after = place[AFTER]!;
    const n = after - first;
    const anchor = fresh[S]! / n;
    let s1 = 0;
    let s2 = 0;
    let least = Infinity;
    let most = -Infinity;
    for (let i = first; i < after; i++) {
      const x = values[i]!;
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
    blocks[base + SUM] = fresh[S]!;
    blocks[base + CARRY] = fresh[LOST]!;
    blocks[base + MIN] = least;
    blocks[base + MAX] = most;
  }

  /** A reading that outlasts the block about to be written: the middle one of the newest three, so that it is no lone outlier. */
  private anchor(): number {
    const { values, size, blockSize } = this;
    const last = this.place[FIRST]! + size - 1;
    const a = values[last % size]!;
    if (this.length < 3 || size - blockSize < 3) return a;
    const b = values[(last - 1) % size]!;
    const c = values[(last - 2) % size]!;
    return Math.max(Math.min(a, b), Math.min(Math.max(a, b), c));
  }

  /** Makes `rest` for the block that is about to be written, while its old readings still stand. */
  private openBlock(): void {
    const { values, fresh, rest, place, middle, back, blocks } = this;
    const first = place[FIRST]!;
    const after = place[AFTER]!;
    const full = place[FULL] === 1;
    const anchor = this.anchor();
    middle[N] = 0;
    const next = (place[BLOCK]! + 1) * FIELDS;
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
    fresh[S1] = 0;
    fresh[S2] = 0;
    fresh[S] = 0;
    fresh[LOST] = 0;
    fresh[LEAST] = least; // the middle stays in the window as long as the block is written: few readings pass its extremes
    fresh[MOST] = most;
    fresh[ABOUT] = anchor;
    // In the first lap there is no old block: then every record is the middle.
    for (let i = after - 1; i >= first; i--) {
      if (full) {
        const x = values[i]!;
        const d = x - anchor;
        s1 += d;
        s2 += d * d;
        const total = sum + x;
        lost += roundingError(sum, x, total);
        sum = total;
        if (x < least) least = x;
        if (x > most) most = x;
      }
      const record = (i - first) * SUMS;
      rest[record + S1] = s1;
      rest[record + S2] = s2;
      rest[record + S] = sum;
      rest[record + LOST] = lost;
      rest[record + LEAST] = least;
      rest[record + MOST] = most;
    }
  }

  /** Copies the newest `min(length, out.length)` readings, oldest first. @returns how many */
  copy(out: Float64Array): number {
    const { values, place, size } = this;
    const n = Math.min(this.length, out.length);
    const from = (place[NEXT]! - n + size) % size;
    const head = Math.min(n, size - from);
    out.set(values.subarray(from, from + head));
    out.set(values.subarray(0, n - head), head);
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

  /** Every array of the state, for snapshots; writing them back restores it. */
  state(): Readonly<Record<string, Float64Array | Int32Array>> {
    const { values, blocks, rest, fresh, back, place } = this;
    return { values, blocks, rest, fresh, back, place };
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
