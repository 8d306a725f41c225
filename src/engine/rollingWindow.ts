import { mad, middle } from '../stats/quickselect.js';
import type { WindowStatistics } from './window.js';

/*
 * The ring is cut into blocks of about sqrt(window) places. Each reading lies in exactly one of four pieces:
 *   old    what is left of the oldest block, which is the one being overwritten (suffix sums, made when it became the oldest)
 *   front  the closed blocks after it, from the lap before (suffix aggregates over blocks, made once a lap)
 *   back   the blocks closed in this lap (one running aggregate)
 *   fresh  the readings of this lap in the block being written (running sums)
 * Nothing is ever subtracted from an aggregate, so that nothing drifts and an outlier leaves no trace. Each piece sums
 * deviations from an anchor that is one of its own readings: the loss in s2 - s1^2 / n is then at most a factor n of the
 * last place. Pieces are joined after Chan, Golub and LeVeque, The American Statistician 37(3), 1983.
 */

// Fields of an aggregate over blocks, in doubles.
const N = 0;
const ANCHOR = 1;
const OFFSET = 2; // mean - anchor
const M2 = 3;
const SUM = 4; // sum of the readings as a pair of doubles
const REST = 5;
const MIN = 6;
const MAX = 7;
const FIELDS = 8;
// Fields of the suffix sums within the old block, one record a place.
const S1 = 0;
const S2 = 1;
const OLD_SUM = 2;
const OLD_REST = 3;
const OLD_MIN = 4;
const OLD_MAX = 5;
const OLD_FIELDS = 6;

let scratch = new Float64Array(512); // for order statistics; shared, since they are asked for one at a time

/** Statistics of the newest `size` readings. Pushing costs the same at every reading and allocates nothing. */
export class RollingWindow {
  private readonly values: Float64Array;
  private readonly blocks: Float64Array;
  private readonly old: Float64Array;
  /** fresh: anchor, s1, s2, sum, rest, min, max; then the anchor of the old block. */
  private readonly fresh = new Float64Array(8);
  private readonly back = new Float64Array(FIELDS);
  /** next place, readings held, block being written, first place of that block, first place after it, whether `joined` is out of date. */
  private readonly place = new Int32Array(6);
  private readonly blockSize: number;
  private readonly blockCount: number;
  /** Result of `join`: mean and M2, the sum of squared deviations from it. */
  private readonly joined = new Float64Array(2);

  /** @param size readings in the window, at least 2 */
  constructor(readonly size: number) {
    this.blockSize = Math.max(2, Math.round(Math.sqrt(size)));
    this.blockCount = Math.ceil(size / this.blockSize);
    this.values = new Float64Array(size);
    this.blocks = new Float64Array(this.blockCount * FIELDS);
    this.old = new Float64Array(this.blockSize * OLD_FIELDS);
    this.place[4] = Math.min(this.blockSize, size);
  }

  get length(): number {
    return this.place[1]!;
  }

  /** Bytes that the state takes. */
  get bytes(): number {
    return Object.values(this.state()).reduce((sum, { byteLength }) => sum + byteLength, 0);
  }

  /** @param x a finite reading */
  push(x: number): void {
    const { place, fresh, values } = this;
    const at = place[0]!;
    if (at === place[3]!) {
      this.openBlock(at);
      fresh[0] = x;
      fresh[1] = 0;
      fresh[2] = 0;
      fresh[3] = x;
      fresh[4] = 0;
      fresh[5] = x;
      fresh[6] = x;
    } else {
      const d = x - fresh[0]!;
      fresh[1]! += d;
      fresh[2]! += d * d;
      const sum = fresh[3]!;
      const total = sum + x;
      fresh[4]! += roundingError(sum, x, total);
      fresh[3] = total;
      if (x < fresh[5]!) fresh[5] = x;
      if (x > fresh[6]!) fresh[6] = x;
    }
    values[at] = x;
    place[5] = 1;
    if (place[1]! < this.size) place[1]!++;
    const next = at + 1;
    if (next === place[4]!) this.closeBlock(next);
    else place[0] = next;
  }

  /** The block's readings of the lap before become the old ones: suffix sums are made while they still stand. */
  private openBlock(at: number): void {
    const { values, old, place, fresh } = this;
    if (place[1]! < this.size) return; // first lap: nothing old yet
    const end = place[4]!;
    const anchor = values[end - 1]!;
    fresh[7] = anchor;
    let s1 = 0;
    let s2 = 0;
    let sum = 0;
    let rest = 0;
    let min = Infinity;
    let max = -Infinity;
    for (let i = end - 1; i >= at; i--) {
      const x = values[i]!;
      const d = x - anchor;
      s1 += d;
      s2 += d * d;
      const total = sum + x;
      rest += roundingError(sum, x, total);
      sum = total;
      if (x < min) min = x;
      if (x > max) max = x;
      const base = (i - at) * OLD_FIELDS;
      old[base + S1] = s1;
      old[base + S2] = s2;
      old[base + OLD_SUM] = sum;
      old[base + OLD_REST] = rest;
      old[base + OLD_MIN] = min;
      old[base + OLD_MAX] = max;
    }
  }

  private closeBlock(next: number): void {
    const { place, fresh, blocks, back } = this;
    const block = place[2]!;
    const base = block * FIELDS;
    const n = place[4]! - place[3]!;
    blocks[base + N] = n;
    blocks[base + ANCHOR] = fresh[0]!;
    blocks[base + OFFSET] = fresh[1]! / n;
    blocks[base + M2] = Math.max(0, fresh[2]! - (fresh[1]! * fresh[1]!) / n);
    blocks[base + SUM] = fresh[3]!;
    blocks[base + REST] = fresh[4]!;
    blocks[base + MIN] = fresh[5]!;
    blocks[base + MAX] = fresh[6]!;
    if (next < this.size) {
      if (block === 0) for (let f = 0; f < FIELDS; f++) back[f] = blocks[base + f]!;
      else add(back, 0, blocks, base);
      place[0] = next;
      place[2] = block + 1;
      place[3] = next;
      place[4] = Math.min(next + this.blockSize, this.size);
      return;
    }
    // A lap is done: this lap's blocks become the front, each with all that follow it joined in.
    for (let b = this.blockCount - 2; b >= 0; b--) add(blocks, b * FIELDS, blocks, (b + 1) * FIELDS);
    back[N] = 0;
    place[0] = 0;
    place[2] = 0;
    place[3] = 0;
    place[4] = Math.min(this.blockSize, this.size);
  }

  /** Joins the pieces into mean and M2, unless nothing was pushed since it was last done. */
  private join(): Float64Array {
    const { place, fresh, blocks, back, old, joined } = this;
    if (place[5] === 0) return joined;
    place[5] = 0;
    const at = place[0]!;
    const held = place[1]!;
    const nFresh = at - place[3]!;
    const full = held === this.size;
    const anchor = fresh[0]!;
    // With no fresh reading in the block all of it is still old, and the front begins with it.
    const front = (nFresh === 0 ? place[2]! : place[2]! + 1) * FIELDS;
    const nOld = full && nFresh > 0 ? place[4]! - at : 0;
    const nFront = full && front < blocks.length ? blocks[front + N]! : 0;
    const nBack = place[2]! > 0 ? back[N]! : 0;
    let mFresh = 0;
    let mOld = 0;
    let mFront = 0;
    let mBack = 0;
    let m2 = 0;
    let sum = 0;
    let rest = 0;
    if (nFresh > 0) {
      mFresh = fresh[1]! / nFresh;
      m2 += Math.max(0, fresh[2]! - fresh[1]! * mFresh);
      sum = fresh[3]!;
      rest = fresh[4]!;
    }
    if (nOld > 0) {
      const base = nFresh * OLD_FIELDS;
      const s1 = old[base + S1]!;
      const offset = s1 / nOld;
      mOld = fresh[7]! - anchor + offset;
      m2 += Math.max(0, old[base + S2]! - s1 * offset);
      const total = sum + old[base + OLD_SUM]!;
      rest += roundingError(sum, old[base + OLD_SUM]!, total) + old[base + OLD_REST]!;
      sum = total;
    }
    if (nFront > 0) {
      mFront = blocks[front + ANCHOR]! - anchor + blocks[front + OFFSET]!;
      m2 += blocks[front + M2]!;
      const total = sum + blocks[front + SUM]!;
      rest += roundingError(sum, blocks[front + SUM]!, total) + blocks[front + REST]!;
      sum = total;
    }
    if (nBack > 0) {
      mBack = back[ANCHOR]! - anchor + back[OFFSET]!;
      m2 += back[M2]!;
      const total = sum + back[SUM]!;
      rest += roundingError(sum, back[SUM]!, total) + back[REST]!;
      sum = total;
    }
    const mean = (nFresh * mFresh + nOld * mOld + nFront * mFront + nBack * mBack) / held;
    const dFresh = mFresh - mean;
    const dOld = mOld - mean;
    const dFront = mFront - mean;
    const dBack = mBack - mean;
    m2 += nFresh * dFresh * dFresh + nOld * dOld * dOld + nFront * dFront * dFront + nBack * dBack * dBack;
    joined[0] = (sum + rest) / held;
    joined[1] = m2;
    return joined;
  }

  /** Mean; NaN before the first reading. */
  mean(): number {
    return this.place[1] === 0 ? NaN : this.join()[0]!;
  }

  /** Sample standard deviation (n - 1); NaN for fewer than two readings. */
  sd(): number {
    const held = this.place[1]!;
    return held < 2 ? NaN : Math.sqrt(this.join()[1]! / (held - 1));
  }

  min(): number {
    return this.extreme(MIN, OLD_MIN, 5, Math.min);
  }

  max(): number {
    return this.extreme(MAX, OLD_MAX, 6, Math.max);
  }

  private extreme(field: number, oldField: number, freshField: number, more: (a: number, b: number) => number): number {
    const { place, fresh, blocks, back, old } = this;
    const held = place[1]!;
    if (held === 0) return NaN;
    const nFresh = place[0]! - place[3]!;
    const front = (nFresh === 0 ? place[2]! : place[2]! + 1) * FIELDS;
    let best = nFresh > 0 ? fresh[freshField]! : place[2]! > 0 ? back[field]! : blocks[front + field]!;
    if (place[2]! > 0) best = more(best, back[field]!);
    if (held === this.size) {
      if (front < blocks.length) best = more(best, blocks[front + field]!);
      if (nFresh > 0 && place[4]! > place[0]!) best = more(best, old[nFresh * OLD_FIELDS + oldField]!);
    }
    return best;
  }

  /** Copies the newest `min(length, out.length)` readings, oldest first. @returns how many */
  copy(out: Float64Array): number {
    const { values, place, size } = this;
    const n = Math.min(place[1]!, out.length);
    const from = (place[0]! - n + size) % size;
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
    const { values, blocks, old, fresh, back, place, joined } = this;
    return { values, blocks, old, fresh, back, place, joined };
  }
}

/** What a + b = total lost in rounding (two-sum; Knuth, The Art of Computer Programming 2, 4.2.2). */
function roundingError(a: number, b: number, total: number): number {
  const part = total - a;
  return a - (total - part) + (b - part);
}

/** Joins aggregate `b` into aggregate `a`; `b` keeps the anchor, as the newer of the two. */
function add(a: Float64Array, at: number, b: Float64Array, bt: number): void {
  const na = a[at + N]!;
  const nb = b[bt + N]!;
  const n = na + nb;
  const anchor = b[bt + ANCHOR]!;
  const ma = a[at + ANCHOR]! - anchor + a[at + OFFSET]!;
  const mb = b[bt + OFFSET]!;
  const mean = (na * ma + nb * mb) / n;
  a[at + M2]! += b[bt + M2]! + na * (ma - mean) * (ma - mean) + nb * (mb - mean) * (mb - mean);
  a[at + N] = n;
  a[at + ANCHOR] = anchor;
  a[at + OFFSET] = mean;
  const sum = a[at + SUM]!;
  const x = b[bt + SUM]!;
  const total = sum + x;
  a[at + REST]! += roundingError(sum, x, total) + b[bt + REST]!;
  a[at + SUM] = total;
  a[at + MIN] = Math.min(a[at + MIN]!, b[bt + MIN]!);
  a[at + MAX] = Math.max(a[at + MAX]!, b[bt + MAX]!);
}
