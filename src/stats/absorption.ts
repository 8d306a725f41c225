/** Run length of a Markov chain that ends when a detector signals. All in readings; the one that signals is counted. */
export interface RunLength {
  /** Mean (average run length) and standard deviation. */
  readonly arl: number;
  readonly sdrl: number;
  readonly median: number;
  readonly p90: number;
}

/** A chain of transient states, sparse by rows: from state i to `to[j]` with probability `weight[j]`, start[i] <= j < start[i+1]. */
export interface TransientChain {
  readonly states: number;
  readonly start: Int32Array;
  readonly to: Int32Array;
  readonly weight: Float64Array;
  /** Probability of a signal at the next reading, from each state. */
  readonly signal: Float64Array;
}

/**
 * Mean and standard deviation of the run length from state 0, by state reduction without subtraction (Grassmann, Taksar
 * and Heyman, Operations Research 33(5), 1985): every operation adds or multiplies positive numbers, so that the
 * relative accuracy does not suffer when the mean is 1e9 readings or more.
 */
export function absorptionMoments(chain: TransientChain): { readonly arl: number; readonly sdrl: number } {
  const { states } = chain;
  const reduced = reduce(chain);
  const mean = solve(reduced, new Float64Array(states).fill(1));
  const second = solve(reduced, mean.map((value) => 2 * value - 1)); // E T^2 = 2t - 1 + Q E T^2
  const arl = mean[0]!;
  return { arl, sdrl: Math.sqrt(Math.max(0, second[0]! - arl * arl)) };
}

interface Reduced {
  readonly states: number;
  /** For each eliminated state its row to lower states, and the column that led to it, as found at its elimination. */
  readonly rows: readonly { readonly to: Int32Array; readonly weight: Float64Array }[];
  readonly columns: readonly { readonly from: Int32Array; readonly weight: Float64Array }[];
  readonly leave: Float64Array;
}

function reduce({ states, start, to, weight, signal }: TransientChain): Reduced {
  const q = new Float64Array(states * states);
  const absorb = Float64Array.from(signal);
  for (let i = 0; i < states; i++) for (let j = start[i]!; j < start[i + 1]!; j++) q[i * states + to[j]!]! += weight[j]!;
  const rows: { to: Int32Array; weight: Float64Array }[] = new Array<{ to: Int32Array; weight: Float64Array }>(states);
  const columns: { from: Int32Array; weight: Float64Array }[] = new Array<{ from: Int32Array; weight: Float64Array }>(states);
  const leave = new Float64Array(states);
  for (let k = states - 1; k >= 0; k--) {
    const out: number[] = [];
    const into: number[] = [];
    let sum = absorb[k]!;
    for (let j = 0; j < k; j++) {
      const w = q[k * states + j]!;
      if (w > 0) {
        out.push(j);
        sum += w;
      }
      if (q[j * states + k]! > 0) into.push(j);
    }
    leave[k] = sum; // 1 - q[k][k], without the subtraction
    const rowTo = Int32Array.from(out);
    const rowWeight = Float64Array.from(out, (j) => q[k * states + j]!);
    const from = Int32Array.from(into);
    const columnWeight = Float64Array.from(into, (i) => q[i * states + k]! / sum);
    for (let c = 0; c < from.length; c++) {
      const base = from[c]! * states;
      const share = columnWeight[c]!;
      for (let r = 0; r < rowTo.length; r++) q[base + rowTo[r]!]! += share * rowWeight[r]!;
      absorb[from[c]!]! += share * absorb[k]!;
    }
    rows[k] = { to: rowTo, weight: rowWeight };
    columns[k] = { from, weight: columnWeight };
  }
  return { states, rows, columns, leave };
}

/** Solves t = reward + Q t for positive rewards. */
function solve({ states, rows, columns, leave }: Reduced, reward: Float64Array): Float64Array {
  const r = Float64Array.from(reward);
  for (let k = states - 1; k > 0; k--) {
    const { from, weight } = columns[k]!;
    for (let c = 0; c < from.length; c++) r[from[c]!]! += weight[c]! * r[k]!;
  }
  const t = new Float64Array(states);
  for (let k = 0; k < states; k++) {
    const { to, weight } = rows[k]!;
    let sum = r[k]!;
    for (let j = 0; j < to.length; j++) sum += weight[j]! * t[to[j]!]!;
    t[k] = sum / leave[k]!;
  }
  return t;
}

const SETTLED = 1e-14; // relative change of the hazard below which the survivors' distribution no longer changes
const STEADY_STEPS = 40;

/**
 * Percentiles of the run length from state 0: the least n with P(T <= n) >= share. Steps the chain until the hazard is
 * constant, then continues geometrically.
 * @param shares ascending, each in (0, 1)
 */
export function absorptionPercentiles(chain: TransientChain, shares: readonly number[]): number[] {
  const { states, start, to, weight, signal } = chain;
  let now = new Float64Array(states);
  let then = new Float64Array(states);
  now[0] = 1;
  let ended = 0;
  let alive = 1;
  let hazard = -1;
  let steady = 0;
  const found: number[] = [];
  for (let n = 1; found.length < shares.length; n++) {
    let lost = 0;
    then.fill(0);
    for (let i = 0; i < states; i++) {
      const mass = now[i]!;
      if (mass === 0) continue;
      lost += mass * signal[i]!;
      for (let j = start[i]!; j < start[i + 1]!; j++) then[to[j]!]! += mass * weight[j]!;
    }
    const rate = lost / alive;
    ended += lost;
    alive = 0;
    for (const mass of then) alive += mass;
    while (found.length < shares.length && ended >= shares[found.length]!) found.push(n);
    steady = Math.abs(rate - hazard) <= SETTLED * rate ? steady + 1 : 0;
    hazard = rate;
    if (steady >= STEADY_STEPS) {
      for (const share of shares.slice(found.length)) found.push(n + Math.max(1, Math.ceil(Math.log((1 - share) / alive) / Math.log1p(-hazard))));
    }
    [now, then] = [then, now];
  }
  return found;
}
