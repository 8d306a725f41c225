import { twoSided } from '../stats/normal.js';
import { alarmId, type ActiveAlarm } from './alarm.js';
import type { Band } from './band.js';
import { Baseline, predictionLimit } from './baseline.js';
import { EvidenceRing } from './evidence.js';
import type { AlarmRaised, EngineEvent } from './events.js';
import { Frozen } from './frozen.js';
import { HAND_FIELDS, INDEX, TIME, VALUE, Z } from './hand.js';
import { Histogram } from './histogram.js';
import { Patterns, RULE_BIT } from './patterns.js';
import { RollingWindow } from './rollingWindow.js';
import { RULES, type Detector, type Side } from './rules.js';
import { pack, unpack, type ChannelSnapshot } from './snapshot.js';
import type { ChannelSpec } from './spec.js';
import type { WindowStatistics } from './window.js';
import { bandSentence, clearedSentence, raisedSentence } from './words.js';

/** What a quiet reading gives: always this one, so that nothing is allocated. */
const NONE: readonly EngineEvent[] = Object.freeze([]);

// Further places of the state, after those of the reading at hand.
const LAST_TIME = HAND_FIELDS; // newest time of any reading
const WATCH_BEGAN = HAND_FIELDS + 1; // first tick, for a channel of which nothing ever came
const SILENT = HAND_FIELDS + 2; // 1 while a silence has been signalled and no reading came since

/**
 * One channel from reading to signal to alarm: a function of (state, reading) and (state, time) to (state, events).
 * Time is an input, in ms since the epoch. The same readings and ticks give the same events on every run.
 */
export class Channel {
  /** value, z, time and index of the reading at hand; then newest time, begin of the watch, whether silent */
  private readonly state = Float64Array.of(NaN, NaN, NaN, -1, NaN, NaN, 0);
  private readonly window: RollingWindow;
  private readonly patterns: Patterns;
  private readonly frozen: Frozen;
  private readonly evidence: EvidenceRing;
  private readonly baseline: Baseline | null;
  private readonly ranged: boolean;
  private readonly rangeLow: number;
  private readonly rangeHigh: number;
  private readonly tolerated: boolean;
  private readonly toleranceLow: number;
  private readonly toleranceHigh: number;
  private readonly inconsistent: boolean;
  private active: ActiveAlarm[] = [];
  private bandInForce: Band | null = null;
  private centre = NaN;
  private sigma = NaN;
  private prediction = Infinity;
  /** Readings since the band was established, by quarter sigmas. */
  readonly histogram: Histogram;

  constructor(readonly spec: ChannelSpec) {
    const { band, k, range, tolerance } = spec;
    this.window = new RollingWindow(spec.window, this.state);
    this.patterns = new Patterns(spec.rules, k / 3, spec.sideRun, this.state);
    this.frozen = new Frozen(spec.resolution, spec.frozenOdds, this.state);
    this.evidence = new EvidenceRing(this.state, spec.sideRun);
    this.histogram = new Histogram(this.state);
    this.ranged = range !== null;
    [this.rangeLow, this.rangeHigh] = range ?? [-Infinity, Infinity];
    this.tolerated = tolerance !== null;
    [this.toleranceLow, this.toleranceHigh] = tolerance ?? [-Infinity, Infinity];
    this.inconsistent = spec.rules.includes('inconsistent');
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
    if (snapshot.band) channel.establish(snapshot.band);
    channel.active = snapshot.alarms.map((alarm) => ({ ...alarm }));
    return channel;
  }

  snapshot(): ChannelSnapshot {
    return {
      version: 1,
      spec: JSON.stringify(this.spec),
      band: this.bandInForce,
      alarms: this.active.map((alarm) => ({ ...alarm })),
      arrays: pack(this.arrays()),
    };
  }

  /**
   * Takes one reading.
   * @param time ms since the epoch; a time before the last one is taken, order is the source's matter
   * @param value in the channel's unit; NaN and infinities are off the scale
   */
  take(time: number, value: number): readonly EngineEvent[] {
    const { state } = this;
    state[INDEX]!++;
    state[VALUE] = value;
    state[TIME] = time;
    if (!(time <= state[LAST_TIME]!)) state[LAST_TIME] = time;
    this.evidence.push();
    if (!(value >= this.rangeLow && value <= this.rangeHigh && value - value === 0)) return this.offScale(time, value);
    this.window.push();
    if (this.bandInForce === null) return this.settle(time, value);

    const z = (value - this.centre) / this.sigma;
    state[Z] = z;
    this.histogram.add();
    let fired = this.patterns.step();
    if (this.inconsistent && (z > this.prediction || z < -this.prediction)) fired |= RULE_BIT.inconsistent;
    const frozen = this.spec.frozen && this.frozen.step();
    const outside = value > this.toleranceHigh || value < this.toleranceLow;
    if (fired === 0 && !frozen && !outside && this.active.length === 0 && state[SILENT] === 0) return NONE;
    return this.report(time, value, z, fired, frozen, outside, false);
  }

  /**
   * Tells the channel what time it is, so that it can find a silence.
   * @param time ms since the epoch, by the same clock as the readings
   */
  tick(time: number): readonly EngineEvent[] {
    const { state, spec } = this;
    if (spec.silentAfter === null || state[SILENT] === 1) return NONE;
    let since = state[LAST_TIME]!;
    if (since !== since) {
      if (state[WATCH_BEGAN]! !== state[WATCH_BEGAN]!) state[WATCH_BEGAN] = time;
      since = state[WATCH_BEGAN]!;
    }
    if (!(time - since > spec.silentAfter)) return NONE;
    state[SILENT] = 1;
    const events: EngineEvent[] = [];
    this.signal(events, 'silent', null, time, null, null, time - since);
    return events;
  }

  /** A reading that measures nothing: it counts, but takes part in no statistics, as a missing reading takes part in none. */
  private offScale(time: number, value: number): readonly EngineEvent[] {
    this.state[Z] = NaN;
    return this.report(time, value, null, 0, false, false, true);
  }

  private settle(time: number, value: number): readonly EngineEvent[] {
    const { baseline, spec, state } = this;
    const outside = value > this.toleranceHigh || value < this.toleranceLow;
    const done = baseline?.take(value) ?? false;
    const events = outside || this.active.length > 0 || state[SILENT] === 1 ? this.report(time, value, null, 0, false, outside, false) : NONE;
    if (!done || baseline === null) return events;
    const band = baseline.band(`learned@${state[INDEX]}`, spec.k, spec.resolution);
    baseline.restart();
    if (band) this.establish(band);
    return [...events, { event: 'band', channel: spec.channel, index: state[INDEX]!, time, band, sentence: bandSentence(spec, band) }];
  }

  private establish(band: Band): void {
    this.bandInForce = band;
    this.centre = band.centre;
    this.sigma = band.sigma;
    this.prediction = predictionLimit(band);
    this.frozen.judgeBy(band.sigma);
  }

  /** The signals of a reading, and what they do to the alarms. Only readings that are not quiet come here. */
  private report(
    time: number,
    value: number,
    z: number | null,
    fired: number,
    frozen: boolean,
    outside: boolean,
    offScale: boolean,
  ): readonly EngineEvent[] {
    const events: EngineEvent[] = [];
    const { spec, state } = this;
    if (state[SILENT] === 1) {
      state[SILENT] = 0;
      this.clear(events, 'silent', time, value, z);
    }
    if (fired !== 0)
      for (const rule of RULES)
        if (fired & RULE_BIT[rule]) this.signal(events, rule, this.patterns.sideOf(rule), time, value, z, 0);
    if (frozen) this.signal(events, 'frozen', null, time, value, z, 0);
    if (outside) this.signal(events, 'tolerance', value > this.toleranceHigh ? 'high' : 'low', time, value, z, 0);
    if (offScale) this.signal(events, 'off-scale', value > this.rangeHigh ? 'high' : value < this.rangeLow ? 'low' : null, time, value, z, 0);
    if (this.active.length === 0) return events;
    const inBand = z === null || (z <= spec.k && z >= -spec.k);
    for (const alarm of [...this.active]) {
      if (alarm.calm < 0) {
        alarm.calm = 0; // signalled at this very reading
        continue;
      }
      const statistical = alarm.detector !== 'tolerance' && alarm.detector !== 'off-scale';
      if (offScale || (statistical && !inBand)) alarm.calm = 0;
      else if (++alarm.calm >= spec.clearAfter && alarm.detector !== 'silent') this.clear(events, alarm.detector, time, value, z);
    }
    return events;
  }

  private signal(
    events: EngineEvent[],
    detector: Detector,
    side: Side | null,
    time: number,
    value: number | null,
    z: number | null,
    silence: number,
  ): void {
    const { spec, state } = this;
    const index = state[INDEX]!;
    const number = value !== null && Number.isFinite(value) ? value : null;
    events.push({ event: 'signal', channel: spec.channel, index, time, detector, side, value: number, z });
    const standing = this.active.find((alarm) => alarm.detector === detector);
    if (standing) {
      standing.signals++;
      standing.calm = -1;
      return;
    }
    const alarm = alarmId(spec.channel, detector, time, index);
    this.active.push({ alarm, detector, side, raisedIndex: index, raisedTime: time, signals: 1, calm: -1 });
    events.push(this.raised(alarm, detector, side, time, value, z, silence));
  }

  private raised(
    alarm: string,
    detector: Detector,
    side: Side | null,
    time: number,
    value: number | null,
    z: number | null,
    silence: number,
  ): AlarmRaised {
    const { spec, frozen, bandInForce } = this;
    const index = this.state[INDEX]!;
    const { repeats } = frozen;
    const lnOdds = frozen.logChance * repeats;
    const odds = detector === 'frozen' ? Math.exp(lnOdds) : z === null ? null : twoSided(z);
    const facts = { detector, side, value, z, odds, band: bandInForce, repeats, lnOdds, silence };
    return {
      event: 'raised',
      alarm,
      channel: spec.channel,
      unit: spec.unit,
      index,
      time,
      detector,
      side,
      value: value !== null && Number.isFinite(value) ? value : null,
      z,
      odds,
      evidence: { band: bandInForce, limits: this.limits(detector, silence), readings: this.evidence.list() },
      sentence: raisedSentence(spec, facts),
    };
  }

  /** The limits that a detector judged by, by name. */
  private limits(detector: Detector, silence: number): Record<string, number> {
    const { spec, frozen } = this;
    switch (detector) {
      case 'silent':
        return { silentAfter: spec.silentAfter!, silence };
      case 'off-scale':
        return this.ranged ? { low: this.rangeLow, high: this.rangeHigh } : {};
      case 'tolerance':
        return this.tolerated ? { low: this.toleranceLow, high: this.toleranceHigh } : {};
      case 'frozen':
        return { repeats: frozen.repeats, step: frozen.smallestStep ?? 0, odds: spec.frozenOdds };
      case 'inconsistent':
        return { prediction: this.prediction };
      case 'eight-one-side':
        return { scale: spec.k / 3, sideRun: spec.sideRun };
      default:
        return { scale: spec.k / 3 };
    }
  }

  private clear(events: EngineEvent[], detector: Detector, time: number, value: number, z: number | null): void {
    const at = this.active.findIndex((alarm) => alarm.detector === detector);
    if (at < 0) return;
    const [alarm] = this.active.splice(at, 1);
    const lasted = time - alarm!.raisedTime;
    events.push({
      event: 'cleared',
      alarm: alarm!.alarm,
      channel: this.spec.channel,
      detector,
      index: this.state[INDEX]!,
      time,
      value: Number.isFinite(value) ? value : null,
      z,
      signals: alarm!.signals,
      lasted,
      sentence: clearedSentence(this.spec, detector, lasted, alarm!.signals),
    });
  }

  /** Index of the newest reading, counted from 0; -1 before the first. */
  get index(): number {
    return this.state[INDEX]!;
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
    return finite(this.state[LAST_TIME]!);
  }

  /** Newest value, NaN and infinities included; null before the first. */
  get value(): number | null {
    return this.index < 0 ? null : this.state[VALUE]!;
  }

  /** Deviation of the newest reading in sigmas of the band; null while settling or off the scale. */
  get z(): number | null {
    return finite(this.state[Z]!);
  }

  get alarms(): readonly ActiveAlarm[] {
    return this.active;
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
    return {
      channel: this.state,
      ...this.window.state(),
      ...this.patterns.arrays(),
      ...this.frozen.arrays(),
      ...this.evidence.arrays(),
      ...this.baseline?.arrays(),
      histogram: this.histogram.counts,
    };
  }
}

const finite = (x: number): number | null => (Number.isNaN(x) ? null : x);
