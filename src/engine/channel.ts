import type { ActiveAlarm } from './alarm.js';
import { Alarms, type Grounds, type Moment } from './alarms.js';
import type { Band } from './band.js';
import { Baseline, predictionLimit } from './baseline.js';
import { evidenceRoom, keepEvidence, layEvidence, listEvidence } from './evidence.js';
import type { EngineEvent } from './events.js';
import { layFrozen, logChance, measureStep, repeat, repeats, smallestStep, TOO_MANY, UNLIKE } from './frozen.js';
import { emptyHistogram, tally } from './histogram.js';
import { findPatterns, layPatterns, RULE_BIT, sideOf } from './patterns.js';
import { pushReading, RollingWindow } from './rollingWindow.js';
import { RULES, type Detector, type Rule, type Side } from './rules.js';
import { pack, unpack, type ChannelSnapshot } from './snapshot.js';
import type { ChannelSpec } from './spec.js';
import { CLOCK, INDEX, INTEGERS, LIMITS, READINGS, SILENCE, SUMS, TIME, VALUE, Z } from './state.js';
import type { WindowStatistics } from './window.js';
import { bandSentence } from './words.js';

/** What a quiet reading gives: always this one, so that nothing is allocated. */
const NONE: readonly EngineEvent[] = Object.freeze([]);

const AT_VALUE = VALUE;
const AT_Z = Z;
const AT_TIME = TIME;
const AT_INDEX = INDEX;
// Doubles: newest time of any reading; first tick, for a channel of which nothing ever came.
const LAST_TIME = CLOCK;
const WATCH_BEGAN = CLOCK + 1;
// Doubles: what may be reported, what the work may be, the band, the limit of `inconsistent`.
const RANGE_LOW = LIMITS;
const RANGE_HIGH = LIMITS + 1;
const TOLERANCE_LOW = LIMITS + 2;
const TOLERANCE_HIGH = LIMITS + 3;
const CENTRE = LIMITS + 4;
const SIGMA = LIMITS + 5;
const PREDICTION = LIMITS + 6;
// Integers: 1 while a silence has been signalled and no reading came since.
const SILENT = SILENCE;
// What a reading did, as one mask: the bits of the rules, and these above them.
const INCONSISTENT = RULE_BIT.inconsistent;
const FROZEN_BIT = 1 << RULES.length;
const OUTSIDE_BIT = 2 << RULES.length;

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
  private readonly judgesRepeats: boolean;
  private readonly judgesSteps: boolean;
  private bandInForce: Band | null = null;

  constructor(readonly spec: ChannelSpec) {
    const { band, k, range, tolerance, sideRun } = spec;
    const s = new Float64Array(READINGS + spec.window + evidenceRoom(sideRun));
    const { c } = this;
    this.s = s;
    s.fill(NaN, 0, SUMS);
    s[AT_INDEX] = -1;
    [s[TOLERANCE_LOW], s[TOLERANCE_HIGH]] = tolerance ?? [-Infinity, Infinity];
    // Infinities measure nothing, whatever the range.
    s[RANGE_LOW] = Math.max(range?.[0] ?? -Infinity, -Number.MAX_VALUE);
    s[RANGE_HIGH] = Math.min(range?.[1] ?? Infinity, Number.MAX_VALUE);
    s[PREDICTION] = Infinity;
    layPatterns(s, c, spec.rules, k, sideRun);
    layEvidence(c, READINGS + spec.window, sideRun);
    this.window = new RollingWindow(spec.window, s, c);
    this.standing = new Alarms(spec);
    this.judgesRepeats = spec.frozen;
    this.judgesSteps = spec.frozen && spec.resolution === null;
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
    s[AT_TIME] = time;
    s[AT_VALUE] = value;
    return this.judge(); // so short is `take` that it is inlined where it is called, and boxes neither number
  }

  /** Judges the reading at hand. */
  private judge(): readonly EngineEvent[] {
    const { s, c } = this;
    const time = s[AT_TIME]!;
    const value = s[AT_VALUE]!;
    const last = s[LAST_TIME]!;
    s[AT_INDEX]!++;
    if (time > last || last !== last) s[LAST_TIME] = time;
    keepEvidence(s, c);
    if (!(value >= s[RANGE_LOW]! && value <= s[RANGE_HIGH]!)) return this.offScale();
    if (pushReading(s, c)) this.window.closeBlock();
    if (this.bandInForce === null) return this.settle();

    const z = (value - s[CENTRE]!) / s[SIGMA]!;
    s[AT_Z] = z;
    tally(s, this.histogram);
    let found = findPatterns(s, c);
    if (Math.abs(z) > s[PREDICTION]!) found |= INCONSISTENT;
    if (this.judgesRepeats) {
      const like = repeat(s, c);
      if (like === TOO_MANY) found |= FROZEN_BIT;
      else if (like === UNLIKE && this.judgesSteps) measureStep(s, c, s[SIGMA]!, this.spec.frozenOdds);
    }
    if (value > s[TOLERANCE_HIGH]! || value < s[TOLERANCE_LOW]!) found |= OUTSIDE_BIT;
    return found === 0 && this.standing.none ? NONE : this.report(found);
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

  /** A reading that measures nothing: it counts, but takes part in no statistics, as a missing reading takes part in none. */
  private offScale(): readonly EngineEvent[] {
    const { s, c, spec } = this;
    s[AT_Z] = NaN;
    c[SILENT] = 0;
    const events: EngineEvent[] = [];
    const moment = this.moment();
    const value = s[AT_VALUE]!;
    const side = value > s[RANGE_HIGH]! ? 'high' : value < s[RANGE_LOW]! ? 'low' : null;
    this.standing.signal(events, 'off-scale', side, moment, () => this.grounds(pair(spec.range)));
    this.standing.settle(events, moment, false);
    return events;
  }

  private settle(): readonly EngineEvent[] {
    const { s, baseline, spec, index } = this;
    const value = s[AT_VALUE]!;
    const outside = value > s[TOLERANCE_HIGH]! || value < s[TOLERANCE_LOW]!;
    const events = outside || !this.standing.none ? this.report(outside ? OUTSIDE_BIT : 0) : NONE;
    if (baseline?.take(value) !== true) return events;
    const band = baseline.band(`learned@${index}`, spec.k, spec.resolution);
    baseline.restart();
    if (band) this.establish(band);
    return [...events, { event: 'band', channel: spec.channel, index, time: s[AT_TIME]!, band, sentence: bandSentence(spec, band) }];
  }

  private establish(band: Band): void {
    const { s, c, spec } = this;
    this.bandInForce = band;
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
      signal('tolerance', s[AT_VALUE]! > s[TOLERANCE_HIGH]! ? 'high' : 'low', () => this.grounds(pair(spec.tolerance)));
    standing.settle(events, moment, true);
    return events;
  }

  private moment(): Moment {
    const { s, index, z } = this;
    return { index, time: s[AT_TIME]!, value: s[AT_VALUE]!, z, band: this.bandInForce };
  }

  private grounds(limits: Readonly<Record<string, number>>, lnOdds: number | null = null): Grounds {
    return { limits, readings: listEvidence(this.s, this.c), lnOdds };
  }

  private ruleLimits(rule: Rule): Record<string, number> {
    if (rule === 'inconsistent') return { prediction: this.s[PREDICTION]! };
    const scale = this.spec.k / 3;
    return rule === 'eight-one-side' ? { scale, sideRun: this.spec.sideRun } : { scale };
  }

  private frozenGrounds(): Grounds {
    const { s, c, spec } = this;
    const step = smallestStep(s, spec.resolution) ?? NaN;
    const lnChance = logChance(step, s[SIGMA]!);
    const times = repeats(c);
    return this.grounds({ repeats: times, step, chance: Math.exp(lnChance), odds: spec.frozenOdds }, times * lnChance);
  }

  /** Index of the newest reading, counted from 0; -1 before the first. */
  get index(): number {
    return this.s[AT_INDEX]!;
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
    return this.index < 0 ? null : this.s[AT_VALUE]!;
  }

  /** Deviation of the newest reading in sigmas of the band; null while settling or off the scale. */
  get z(): number | null {
    return finite(this.s[AT_Z]!);
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
