import type { ActiveAlarm } from './alarm.js';
import { Alarms, type Grounds, type Moment } from './alarms.js';
import type { Band } from './band.js';
import { Baseline, predictionLimit } from './baseline.js';
import { evidenceRoom, layEvidence, listEvidence } from './evidence.js';
import type { EngineEvent } from './events.js';
import { layFrozen, logChance, measureStep, smallestStep } from './frozen.js';
import { emptyHistogram } from './histogram.js';
import { BLOCK_BIT, FROZEN_BIT, OFF_SCALE_BIT, OUTSIDE_BIT, quietPath, SETTLING_BIT, STEP_BIT } from './quietPath.js';
import { RollingWindow } from './rollingWindow.js';
import { RULE_BIT, ruleMask, RULES, type Detector, type Rule, type Side } from './rules.js';
import { pack, unpack, type ChannelSnapshot } from './snapshot.js';
import type { ChannelSpec } from './spec.js';
import * as state from './state.js';
import { sideOf, SUPPLEMENTARY, supplementary } from './supplementary.js';
import type { WindowStatistics } from './window.js';
import { bandSentence } from './words.js';

/** What a quiet reading gives: always this one, so that nothing is allocated. */
const NONE: readonly EngineEvent[] = Object.freeze([]);

// Constants of this file, see state.ts.
const { VALUE, TIME, LINE1, LINE2, LINE3, RANGE_LOW, RANGE_HIGH, TOLERANCE_LOW, TOLERANCE_HIGH, CENTRE, SIGMA, PREDICTION } = state;
const { Z, INDEX, LAST_TIME, WATCH_BEGAN, READINGS, S1, SIDE_RUN, ENABLED, HAS_BAND, SILENT, WATCHES_REPEATS, REPEATS, INTEGERS } = state;

/**
 * One channel from reading to signal to alarm: a function of (state, reading) and (state, time) to (state, events).
 * Time is an input, in ms since the epoch. The same readings and ticks give the same events on every run.
 */
export class Channel {
  /** The doubles and the integers of the state: see state.ts. */
  private readonly s: Float64Array;
  private readonly c = new Int32Array(INTEGERS);
  /** Readings since the band was established, by quarter sigmas: see `emptyHistogram`. */
  readonly histogram = emptyHistogram();
  private readonly window: RollingWindow;
  private readonly baseline: Baseline | null;
  private readonly standing: Alarms;
  private readonly supplementary: boolean;
  private bandInForce: Band | null = null;

  constructor(readonly spec: ChannelSpec) {
    const { band, k, range, tolerance, sideRun } = spec;
    const s = new Float64Array(READINGS + spec.window + evidenceRoom(sideRun));
    const { c } = this;
    this.s = s;
    s.fill(NaN, 0, S1);
    s[INDEX] = -1;
    [s[TOLERANCE_LOW], s[TOLERANCE_HIGH]] = tolerance ?? [-Infinity, Infinity];
    // Infinities measure nothing, whatever the range.
    s[RANGE_LOW] = Math.max(range?.[0] ?? -Infinity, -Number.MAX_VALUE);
    s[RANGE_HIGH] = Math.min(range?.[1] ?? Infinity, Number.MAX_VALUE);
    s[PREDICTION] = Infinity;
    [s[LINE1], s[LINE2], s[LINE3]] = [k / 3, (2 * k) / 3, k];
    c[SIDE_RUN] = sideRun;
    c[ENABLED] = ruleMask(spec.rules);
    c[WATCHES_REPEATS] = spec.frozen ? 1 : 0;
    layEvidence(s, c, READINGS + spec.window, sideRun);
    this.window = new RollingWindow(spec.window, s, c);
    this.standing = new Alarms(spec);
    this.supplementary = (c[ENABLED] & SUPPLEMENTARY) !== 0;
    if ('learn' in band) this.baseline = new Baseline(band.learn);
    else {
      this.baseline = null;
      const { centre, sigma } = band;
      this.establish({
        id: band.id ?? 'given',
        origin: band.id === undefined ? 'given' : 'accepted',
        centre,
        sigma,
        n: band.n ?? null,
        centreUncertainty: null,
        sigmaUncertainty: null,
        k,
        low: centre - k * sigma,
        high: centre + k * sigma,
      });
    }
  }

  /** The channel in a state kept before. @throws Error where the snapshot is of another specification or version */
  static restore(spec: ChannelSpec, snapshot: ChannelSnapshot): Channel {
    if ((snapshot.version as number) !== 1) throw new Error('The snapshot is of another version of the engine.');
    if (snapshot.spec !== JSON.stringify(spec)) throw new Error(`The snapshot of ${spec.channel} belongs to another specification.`);
    const channel = new Channel(spec);
    unpack(snapshot.arrays, channel.arrays());
    channel.bandInForce = snapshot.band;
    channel.standing.standing = snapshot.alarms.map((alarm) => ({ ...alarm }));
    return channel;
  }

  snapshot(): ChannelSnapshot {
    return {
      version: 1,
      spec: JSON.stringify(this.spec),
      band: this.bandInForce,
      alarms: this.alarms.map((alarm) => ({ ...alarm })),
      arrays: pack(this.arrays()),
    };
  }

  /**
   * Takes one reading.
   * @param time ms since the epoch; a time before the last one is taken, order is the source's matter
   * @param value in the channel's unit; NaN and infinities are off the scale
   */
  take(time: number, value: number): readonly EngineEvent[] {
    const { s } = this;
    s[TIME] = time;
    s[VALUE] = value;
    let found = quietPath(s, this.c, this.histogram);
    if (this.supplementary && (found & (OFF_SCALE_BIT | SETTLING_BIT)) === 0) found |= supplementary(s, this.c);
    return found === 0 && this.standing.none ? NONE : this.attend(found);
  }

  /** A reading that is not quiet, or after which the window must be attended to. */
  private attend(found: number): readonly EngineEvent[] {
    if ((found & OFF_SCALE_BIT) !== 0) return this.offScale();
    if ((found & BLOCK_BIT) !== 0) this.window.attend();
    if ((found & SETTLING_BIT) !== 0) return this.settle(found & OUTSIDE_BIT);
    if ((found & STEP_BIT) !== 0) measureStep(this.s, this.c, this.s[SIGMA]!, this.spec.frozenOdds);
    const signals = found & ~(BLOCK_BIT | STEP_BIT);
    return signals === 0 && this.standing.none ? NONE : this.report(signals);
  }

  /**
   * Tells the channel what time it is, so that it can find a silence.
   * @param time ms since the epoch, by the same clock as the readings
   */
  tick(time: number): readonly EngineEvent[] {
    const { s, c } = this;
    const { silentAfter } = this.spec;
    if (silentAfter === null || c[SILENT] === 1) return NONE;
    if (Number.isNaN(s[WATCH_BEGAN])) s[WATCH_BEGAN] = time;
    const since = this.lastTime ?? s[WATCH_BEGAN]!;
    if (!(time - since > silentAfter)) return NONE;
    c[SILENT] = 1;
    const events: EngineEvent[] = [];
    const moment = { index: this.index, time, value: null, z: null, band: this.bandInForce };
    this.standing.signal(events, 'silent', null, moment, () => this.grounds({ silentAfter, silence: time - since }));
    return events;
  }

  private offScale(): readonly EngineEvent[] {
    const { s, c, spec } = this;
    s[Z] = NaN;
    c[SILENT] = 0;
    const events: EngineEvent[] = [];
    const moment = this.moment();
    const value = s[VALUE]!;
    const side = value > s[RANGE_HIGH]! ? 'high' : value < s[RANGE_LOW]! ? 'low' : null;
    this.standing.signal(events, 'off-scale', side, moment, () => this.grounds(pair(spec.range), null, true));
    this.standing.settle(events, moment, false);
    return events;
  }

  private settle(outside: number): readonly EngineEvent[] {
    const { s, baseline, spec, index } = this;
    const events = outside !== 0 || !this.standing.none ? this.report(outside) : NONE;
    if (baseline?.take(s[VALUE]!) !== true) return events;
    const band = baseline.band(`learned@${index}`, spec.k, spec.resolution);
    baseline.restart();
    if (band) this.establish(band);
    return [...events, { event: 'band', channel: spec.channel, index, time: s[TIME]!, band, sentence: bandSentence(spec, band) }];
  }

  private establish(band: Band): void {
    const { s, c, spec } = this;
    this.bandInForce = band;
    c[HAS_BAND] = 1;
    s[CENTRE] = band.centre;
    s[SIGMA] = band.sigma;
    if (spec.rules.includes('inconsistent')) s[PREDICTION] = predictionLimit(band);
    layFrozen(s, c, band.sigma, spec.resolution, spec.frozenOdds);
  }

  /** The signals of a reading on the scale, and what they do to the alarms. Only readings that are not quiet come here. */
  private report(found: number): readonly EngineEvent[] {
    const events: EngineEvent[] = [];
    const { spec, standing, s, c } = this;
    const moment = this.moment();
    const signal = (detector: Detector, side: Side | null, grounds: () => Grounds): void =>
      standing.signal(events, detector, side, moment, grounds);
    c[SILENT] = 0;
    for (const rule of RULES) if (found & RULE_BIT[rule]) signal(rule, sideOf(rule, s, c), () => this.grounds(this.ruleLimits(rule)));
    if (found & FROZEN_BIT) signal('frozen', null, () => this.frozenGrounds());
    if (found & OUTSIDE_BIT)
      signal('tolerance', s[VALUE]! > s[TOLERANCE_HIGH]! ? 'high' : 'low', () => this.grounds(pair(spec.tolerance)));
    standing.settle(events, moment, true);
    return events;
  }

  private moment(): Moment {
    const { s, index, z } = this;
    return { index, time: s[TIME]!, value: s[VALUE]!, z, band: this.bandInForce };
  }

  private grounds(limits: Readonly<Record<string, number>>, lnOdds: number | null = null, hand = false): Grounds {
    return { limits, readings: listEvidence(this.s, this.c, hand), lnOdds };
  }

  private ruleLimits(rule: Rule): Record<string, number> {
    if (rule === 'inconsistent') return { prediction: this.s[PREDICTION]! };
    const scale = this.spec.k / 3;
    return rule === 'eight-one-side' ? { scale, sideRun: this.spec.sideRun } : { scale };
  }

  private frozenGrounds(): Grounds {
    const { s, c, spec } = this;
    const step = smallestStep(s, c, spec.resolution) ?? NaN;
    const lnChance = logChance(step, s[SIGMA]!);
    const times = c[REPEATS]!;
    return this.grounds({ repeats: times, step, chance: Math.exp(lnChance), odds: spec.frozenOdds }, times * lnChance);
  }

  /** Index of the newest reading, counted from 0; -1 before the first. */
  get index(): number {
    return this.s[INDEX]!;
  }

  /** The band in force; null while settling. */
  get band(): Band | null {
    return this.bandInForce;
  }

  /** While settling: readings taken and needed; else null. */
  get settled(): readonly [taken: number, needed: number] | null {
    return this.bandInForce === null && this.baseline ? [this.baseline.taken, this.baseline.needed] : null;
  }

  /** Newest time of a reading, ms since the epoch; null before the first. */
  get lastTime(): number | null {
    return finite(this.s[LAST_TIME]!);
  }

  /** Newest value, NaN and infinities included; null before the first. */
  get value(): number | null {
    return this.index < 0 ? null : this.s[VALUE]!;
  }

  /** Deviation of the newest reading in sigmas of the band; null while settling or off the scale. */
  get z(): number | null {
    return finite(this.s[Z]!);
  }

  /** Standing alarms, oldest first. */
  get alarms(): readonly ActiveAlarm[] {
    return this.standing.standing;
  }

  /** Mean of the rolling window, in O(1). NaN before the first reading. Likewise sd, min and max. */
  mean(): number {
    return this.window.mean();
  }

  sd(): number {
    return this.window.sd();
  }

  min(): number {
    return this.window.min();
  }

  max(): number {
    return this.window.max();
  }

  /** All statistics of the rolling window; linear in its length. */
  statistics(): WindowStatistics {
    return this.window.statistics();
  }

  /** Lag-1 autocorrelation of the rolling window; linear in its length. */
  lag1(): number {
    return this.window.lag1();
  }

  /** Copies the window's newest readings, oldest first. @returns how many */
  copyWindow(out: Float64Array): number {
    return this.window.copy(out);
  }

  /** Bytes of the state's arrays. */
  get bytes(): number {
    return Object.values(this.arrays()).reduce((sum, { byteLength }) => sum + byteLength, 0);
  }

  private arrays(): Readonly<Record<string, Float64Array | Int32Array | Uint32Array>> {
    return { doubles: this.s, integers: this.c, ...this.window.arrays(), ...this.baseline?.arrays(), histogram: this.histogram };
  }
}

const finite = (x: number): number | null => (Number.isNaN(x) ? null : x);
const pair = (limits: readonly [number, number] | null): Record<string, number> => (limits === null ? {} : { low: limits[0], high: limits[1] });
