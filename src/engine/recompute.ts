import { twoSided } from '../stats/normal.js';
import { predictionLimit } from './baseline.js';
import { Channel } from './channel.js';
import type { AlarmRaised, Evidence } from './events.js';
import { FEWEST_REPEATS, logChance } from './frozen.js';
import { RULES, type Rule } from './rules.js';

/** What an alarm says of itself: a raised event, or the same read back from a log, where a value that JSON lacks is null. */
export interface Claim extends Pick<AlarmRaised, 'detector' | 'side' | 'value' | 'z' | 'odds'> {
  readonly evidence: Pick<Evidence, 'band' | 'limits'> & { readonly readings: readonly { readonly value: number | null }[] };
}

/**
 * Whether the verdict follows from the alarm's own evidence: the same detector, judging the same readings by the same
 * band and limits, signals at the last of them, on the same side and with the same odds.
 */
export function recompute(claim: Claim): boolean {
  const { detector, value, z, odds, evidence } = claim;
  const { band, limits, readings } = evidence;
  const newest = readings.at(-1)?.value ?? null;
  if (detector === 'silent') return limits.silence! > limits.silentAfter!;
  if (value !== newest && !(value === null && !Number.isFinite(newest))) return false;
  if (detector === 'off-scale') return value === null || outside(claim);
  if (z !== null && (band === null || z !== (value! - band.centre) / band.sigma)) return false;
  if (detector === 'frozen') return isFrozen(claim);
  if (z !== null && !near(odds, twoSided(z))) return false;
  if (detector === 'tolerance') return outside(claim);
  return (RULES as readonly string[]).includes(detector) && signals(detector, claim);
}

/** Both sides of the limits are in the claim; the side named must be the one that was left. */
function outside({ value, side, evidence: { limits } }: Claim): boolean {
  return side === 'high' ? value! > limits.high! : side === 'low' && value! < limits.low!;
}

function isFrozen({ value, odds, evidence: { band, limits, readings } }: Claim): boolean {
  const { repeats, step, odds: accepted } = limits;
  if (band === null || !(repeats! >= FEWEST_REPEATS)) return false;
  const like = readings.slice(-(repeats! + 1));
  if (like.length < Math.min(repeats! + 1, readings.length) || !like.every((reading) => reading.value === value)) return false;
  const lnOdds = repeats! * logChance(step!, band.sigma);
  return lnOdds < Math.log(accepted!) && near(odds, Math.exp(lnOdds));
}

/** A channel with this rule alone, fed with the evidence. */
function signals(rule: Rule, { side, evidence: { band, limits, readings } }: Claim): boolean {
  if (band === null) return false;
  if (rule === 'inconsistent' && !near(limits.prediction!, predictionLimit(band))) return false;
  const { centre, sigma, n, k } = band;
  const channel = new Channel({
    channel: '',
    unit: '',
    every: null,
    silentAfter: null,
    range: null,
    tolerance: null,
    resolution: null,
    band: n === null ? { centre, sigma } : { centre, sigma, n },
    rules: [rule],
    k,
    sideRun: limits.sideRun ?? 8,
    frozen: false,
    frozenOdds: 0,
    window: 2,
    clearAfter: 1,
  });
  const [last] = readings.map(({ value }, i) => channel.take(i, value ?? NaN)).slice(-1);
  return last?.some((event) => event.event === 'signal' && event.detector === rule && event.side === side) ?? false;
}

/** Equal but for rounding, which may differ between versions. */
function near(a: number | null, b: number): boolean {
  return a !== null && Math.abs(a - b) <= 1e-9 * Math.abs(b);
}
