import { mad, middle } from '../stats/quickselect.js';
import { VALUE } from './hand.js';
import type { WindowStatistics } from './window.js';

/*
 * The ring is cut into blocks of about sqrt(window) places. At any time each reading lies in one of three pieces:
 *   fresh   this lap's readings in the block being written, as running sums
 *   old     what is left of the oldest block, which is the one being overwritten
 *   middle  all the other blocks
 * When a block is opened, `rest` is made: for each number of fresh readings, the aggregate of old and middle together.
 * A query joins two aggregates. Nothing is ever subtracted from one, so that nothing drifts and an outlier leaves no
 * trace. Sums of squares are taken about an anchor which is one of the summed readings: the loss in s2 - s1^2 / n is then
 * at most a factor n of the last place. Joining is after Chan, Golub and LeVeque, The American Statistician 37(3), 1983.
 */

// An aggregate, in doubles. Mean = anchor + offset; the sum of the readings is kept to twice the digits of a double.
const N = 0;
const ANCHOR = 1;
const OFFSET = 2;
const M2 = 3;
const SUM = 4;
const CARRY = 5;
const MIN = 6;
const MAX = 7;
const FIELDS = 8;
// A record of `rest`: an aggregate without count and anchor.
const R_OFFSET = 0;
const R_M2 = 1;
const R_SUM = 2;
const R_CARRY = 3;
const R_MIN = 4;
const R_MAX = 5;
const R_FIELDS = 6;
// `fresh`: sums of the readings in the block being written; the anchor of `rest`, less that of fresh; the result of `join`.
const F_ANCHOR = 0;
const F_S1 = 1;
const F_S2 = 2;
const F_SUM = 3;
const F_CARRY = 4;
const F_MIN = 5;
const F_MAX = 6;
const REST_ANCHOR = 7;
const APART = 8;
const MEAN = 9;
const SQUARES = 10;
const F_FIELDS = 11;
// `place`: next place, readings held, block being written, its first place, the place after it, 1 when MEAN and SQUARES are out of date.
const NEXT = 0;
const HELD = 1;
const BLOCK = 2;
const FIRST = 3;
const AFTER = 4;
const STALE = 5;
const P_FIELDS = 6;

let scratch = new Float64Array(512); // for order statistics; shared, since they are asked for one at a time

/** Reciprocals of whole numbers, shared by all windows: a product is several times as fast as a division. */
let reciprocals = new Float64Array(0);
function reciprocalsTo(n: number): Float64Array {
  if (reciprocals.length <= n) reciprocals = Float64Array.from({ length: n + 1 }, (_, i) => 1 / i);
  return reciprocals;
}

/** Statistics of the newest `size` readings. Pushing costs the same at every reading and allocates nothing. */
export class RollingWindow {
  private readonly values: Float64Array;
  private readonly blocks: Float64Array;
  private readonly rest: Float64Array;
  private readonly fresh = new Float64Array(F_FIELDS);
  private readonly middle = new Float64Array(FIELDS);
  private readonly back = new Float64Array(FIELDS);
  private readonly place = new Int32Array(P_FIELDS);
  private readonly over: Float64Array;
  private readonly blockSize: number;
  private readonly blockCount: number;

  /**
   * @param size readings in the window, at least 2
   * @param hand the reading at hand, whose value `push` takes
   */
  constructor(
    readonly size: number,
    private readonly hand: Float64Array,
  ) {
    this.blockSize = Math.max(2, Math.round(Math.sqrt(size)));
    this.blockCount = Math.ceil(size / this.blockSize);
    this.values = new Float64Array(size);
    this.blocks = new Float64Array(this.blockCount * FIELDS);
    this.rest = new Float64Array(this.blockSize * R_FIELDS);
    this.over = reciprocalsTo(size);
    this.place[AFTER] = Math.min(this.blockSize, size);
  }

  get length(): number {
    return this.place[HELD]!;
  }

  /** Takes the finite reading in hand. */
  push(): void {
    const { place, fresh, hand } = this;
    const x = hand[VALUE]!;
    const at = place[NEXT]!;
    this.values[at] = x;
    place[STALE] = 1;
    if (place[HELD]! < this.size) place[HELD]!++;
    if (at === place[FIRST]!) {
      fresh[F_ANCHOR] = x;
      fresh[F_S1] = 0;
      fresh[F_S2] = 0;
      fresh[F_SUM] = x;
      fresh[F_CARRY] = 0;
      fresh[F_MIN] = x;
      fresh[F_MAX] = x;
      fresh[APART] = x - fresh[REST_ANCHOR]!;
    } else {
      const d = x - fresh[F_ANCHOR]!;
      fresh[F_S1]! += d;
      fresh[F_S2]! += d * d;
      const sum = fresh[F_SUM]!;
      const total = sum + x;
      fresh[F_CARRY]! += roundingError(sum, x, total);
      fresh[F_SUM] = total;
      if (x < fresh[F_MIN]!) fresh[F_MIN] = x;
      if (x > fresh[F_MAX]!) fresh[F_MAX] = x;
    }
    place[NEXT] = at + 1;
    if (at + 1 === place[AFTER]!) this.closeBlock();
  }

  private closeBlock(): void {
    const { place, fresh, blocks, back, over } = this;
    const base = place[BLOCK]! * FIELDS;
    const n = place[AFTER]! - place[FIRST]!;
    blocks[base + N] = n;
    blocks[base + ANCHOR] = fresh[F_ANCHOR]!;
    blocks[base + OFFSET] = fresh[F_S1]! * over[n]!;
    blocks[base + M2] = Math.max(0, fresh[F_S2]! - fresh[F_S1]! * fresh[F_S1]! * over[n]!);
    blocks[base + SUM] = fresh[F_SUM]!;
    blocks[base + CARRY] = fresh[F_CARRY]!;
    blocks[base + MIN] = fresh[F_MIN]!;
    blocks[base + MAX] = fresh[F_MAX]!;
    if (place[AFTER]! < this.size) {
      join(back, 0, blocks, base);
      place[BLOCK]!++;
    } else {
      // A lap is done: each of its blocks takes in all that follow it, for the middles of the next lap.
      for (let b = this.blockCount - 2; b >= 0; b--) join(blocks, b * FIELDS, blocks, (b + 1) * FIELDS);
      back[N] = 0;
      place[BLOCK] = 0;
      place[NEXT] = 0;
    }
    place[FIRST] = place[NEXT]!;
    place[AFTER] = Math.min(place[NEXT]! + this.blockSize, this.size);
    this.openBlock();
  }

  /** Makes `rest` for the block that is about to be written, while its old readings still stand. */
  private openBlock(): void {
    const { values, rest, place, fresh, middle, back, blocks, over } = this;
    const first = place[FIRST]!;
    const after = place[AFTER]!;
    const full = place[HELD] === this.size;
    middle[N] = 0;
    const next = (place[BLOCK]! + 1) * FIELDS;
    if (full && next < blocks.length) join(middle, 0, blocks, next);
    if (back[N]! > 0) join(middle, 0, back, 0);
    const nMiddle = middle[N];
    const anchor = full ? values[after - 1]! : middle[ANCHOR]!;
    const mMiddle = nMiddle > 0 ? middle[ANCHOR]! - anchor + middle[OFFSET]! : 0;
    fresh[REST_ANCHOR] = anchor;
    let s1 = 0;
    let s2 = 0;
    let sum = middle[SUM]!;
    let carry = middle[CARRY]!;
    let min = middle[MIN]!;
    let max = middle[MAX]!;
    if (nMiddle === 0) {
      sum = 0;
      carry = 0;
      min = Infinity;
      max = -Infinity;
    }
    for (let i = after - 1; i >= first; i--) {
      let k = 0;
      if (full) {
        k = after - i;
        const x = values[i]!;
        const d = x - anchor;
        s1 += d;
        s2 += d * d;
        const total = sum + x;
        carry += roundingError(sum, x, total);
        sum = total;
        if (x < min) min = x;
        if (x > max) max = x;
      }
      const record = (i - first) * R_FIELDS;
      const mOld = k > 0 ? s1 * over[k]! : 0;
      const apart = mOld - mMiddle;
      const share = k + nMiddle > 0 ? over[k + nMiddle]! : 0;
      rest[record + R_OFFSET] = (s1 + nMiddle * mMiddle) * share;
      rest[record + R_M2] = Math.max(0, s2 - s1 * mOld) + (nMiddle > 0 ? middle[M2]! : 0) + apart * apart * (k * nMiddle * share);
      rest[record + R_SUM] = sum;
      rest[record + R_CARRY] = carry;
      rest[record + R_MIN] = min;
      rest[record + R_MAX] = max;
    }
  }

  /** Joins fresh and rest into MEAN and SQUARES. */
  private settle(): void {
    const { place, fresh, rest, over } = this;
    place[STALE] = 0;
    const held = place[HELD]!;
    const nFresh = place[NEXT]! - place[FIRST]!;
    const record = nFresh * R_FIELDS;
    const nRest = held - nFresh;
    if (nFresh === 0) {
      fresh[MEAN] = (rest[record + R_SUM]! + rest[record + R_CARRY]!) / held;
      fresh[SQUARES] = rest[record + R_M2]!;
      return;
    }
    const s1 = fresh[F_S1]!;
    const offset = s1 * over[nFresh]!;
    let squares = fresh[F_S2]! - s1 * offset;
    if (squares < 0) squares = 0;
    const sum = fresh[F_SUM]!;
    if (nRest === 0) {
      fresh[MEAN] = (sum + fresh[F_CARRY]!) / held;
      fresh[SQUARES] = squares;
      return;
    }
    const apart = fresh[APART]! + (offset - rest[record + R_OFFSET]!);
    fresh[SQUARES] = squares + rest[record + R_M2]! + apart * apart * (nFresh * nRest * over[held]!);
    const other = rest[record + R_SUM]!;
    const total = sum + other;
    fresh[MEAN] = (total + (roundingError(sum, other, total) + fresh[F_CARRY]! + rest[record + R_CARRY]!)) / held;
  }

  /** Mean; NaN before the first reading. */
  mean(): number {
    if (this.place[STALE] !== 0) this.settle();
    return this.place[HELD] === 0 ? NaN : this.fresh[MEAN]!;
  }

  /** Sample standard deviation (n - 1); NaN for fewer than two readings. */
  sd(): number {
    if (this.place[STALE] !== 0) this.settle();
    const held = this.place[HELD]!;
    return held < 2 ? NaN : Math.sqrt(this.fresh[SQUARES]! / (held - 1));
  }

  min(): number {
    return this.extreme(F_MIN, R_MIN, Math.min);
  }

  max(): number {
    return this.extreme(F_MAX, R_MAX, Math.max);
  }

  private extreme(ofFresh: number, ofRest: number, more: (a: number, b: number) => number): number {
    const { place, fresh, rest } = this;
    const held = place[HELD]!;
    const nFresh = place[NEXT]! - place[FIRST]!;
    if (held === 0) return NaN;
    if (nFresh === held) return fresh[ofFresh]!;
    const other = rest[nFresh * R_FIELDS + ofRest]!;
    return nFresh === 0 ? other : more(fresh[ofFresh]!, other);
  }

  /** Copies the newest `min(length, out.length)` readings, oldest first. @returns how many */
  copy(out: Float64Array): number {
    const { values, place, size } = this;
    const n = Math.min(place[HELD]!, out.length);
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
