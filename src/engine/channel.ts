import type { ActiveAlarm } from './alarm.js';
import { Alarms, type Grounds, type Moment } from './alarms.js';
import type { Band } from './band.js';
import { Baseline, predictionLimit } from './baseline.js';
import { EvidenceRing } from './evidence.js';
import type { EngineEvent } from './events.js';
import { Frozen } from './frozen.js';
import { HAND_FIELDS, INDEX, TIME, VALUE, Z } from './hand.js';
import { Histogram } from './histogram.js';
import { Patterns, RULE_BIT } from './patterns.js';
import { RollingWindow } from './rollingWindow.js';
import { RULES, type Detector, type Side } from './rules.js';
import { pack, unpack, type ChannelSnapshot } from './snapshot.js';
import type { ChannelSpec } from './spec.js';
import type { WindowStatistics } from './window.js';
import { bandSentence } from './words.js';

/** What a quiet reading gives: always this one, so that nothing is allocated. */
const NONE: readonly EngineEvent[] = Object.freeze([]);

const AT_VALUE = VALUE;
const AT_Z = Z;
const AT_TIME = TIME;
const AT_INDEX = INDEX;
const INCONSISTENT = RULE_BIT.inconsistent;
// Further places of the state, after those of the reading at hand.
const LAST_TIME = HAND_FIELDS; // newest time of any reading
const WATCH_BEGAN = HAND_FIELDS + 1; // first tick, for a channel of which nothing ever came
const SILENT = HAND_FIELDS + 2; // 1 while a silence has been signalled and no reading came since
// Places of the limits: numbers in an array need no look at their kind before they are used.
const RANGE_LOW = 0;
const RANGE_HIGH = 1;
const TOLERANCE_LOW = 2;
const TOLERANCE_HIGH = 3;
const CENTRE = 4;
const SIGMA = 5;
const PREDICTION = 6;

/**
 * One channel from reading to signal to alarm: a function of (state, reading) and (state, time) to (state, events).
 * Time is an input, in ms since the epoch. The same readings and ticks give the same events on every run.
 */
export class Channel {
  /** value, z, time and index of the reading at hand; then newest time, begin of the watch, whether silent */
  private readonly state = Float64Array.of(NaN, NaN, NaN, -1, NaN, NaN, 0);
  private readonly limits: Float64Array;
  private readonly window: RollingWindow;
  private readonly patterns: Patterns;
  private readonly frozen: Frozen;
  private readonly evidence: EvidenceRing;
  private readonly baseline: Baseline | null;
  private readonly standing: Alarms;
  private readonly watchFrozen: boolean;
  private bandInForce: Band | null = null;
  /** Readings since the band was established, by quarter sigmas. */
  readonly histogram: Histogram;

  constructor(readonly spec: ChannelSpec) {
    const { band, k, range, tolerance } = spec;
    const [rangeLow, rangeHigh] = range ?? [-Infinity, Infinity];
    const [toleranceLow, toleranceHigh] = tolerance ?? [-Infinity, Infinity];
    // Infinities measure nothing, whatever the range.
    const [least, most] = [Math.max(rangeLow, -Number.MAX_VALUE), Math.min(rangeHigh, Number.MAX_VALUE)];
    this.limits = Float64Array.of(least, most, toleranceLow, toleranceHigh, NaN, NaN, Infinity);
    this.window = new RollingWindow(spec.window, this.state);
    this.patterns = new Patterns(spec.rules, k, spec.sideRun, this.state);
    this.frozen = new Frozen(spec.resolution, spec.frozenOdds, this.state);
    this.evidence = new EvidenceRing(this.state, spec.sideRun);
    this.histogram = new Histogram(this.state);
    this.standing = new Alarms(spec);
    this.watchFrozen = spec.frozen;
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
    const { state, limits } = this;
    state[AT_INDEX]!++;
    state[AT_VALUE] = value;
    state[AT_TIME] = time;
    const last = state[LAST_TIME]!;
    if (time > last || last !== last) state[LAST_TIME] = time;
    this.evidence.push();
    if (!(value >= limits[RANGE_LOW]! && value <= limits[RANGE_HIGH]!)) return this.offScale(time, value);
    this.window.push();
    if (this.bandInForce === null) return this.settle(time, value);

    const z = (value - limits[CENTRE]!) / limits[SIGMA]!;
    state[AT_Z] = z;
    this.histogram.add();
    let fired = this.patterns.step();
    if (Math.abs(z) > limits[PREDICTION]!) fired |= INCONSISTENT;
    const frozen = this.watchFrozen && this.frozen.step();
    const outside = value > limits[TOLERANCE_HIGH]! || value < limits[TOLERANCE_LOW]!;
    if (fired === 0 && !frozen && !outside && this.standing.standing.length === 0) return NONE;
    return this.report(time, value, z, fired, frozen, outside);
  }

  /**
   * Tells the channel what time it is, so that it can find a silence.
   * @param time ms since the epoch, by the same clock as the readings
   */
  tick(time: number): readonly EngineEvent[] {
    const { state } = this;
    const { silentAfter } = this.spec;
    if (silentAfter === null || state[SILENT] === 1) return NONE;
    if (Number.isNaN(state[WATCH_BEGAN])) state[WATCH_BEGAN] = time;
    const since = this.lastTime ?? state[WATCH_BEGAN]!;
    if (!(time - since > silentAfter)) return NONE;
    state[SILENT] = 1;
    const events: EngineEvent[] = [];
    const moment = { index: this.index, time, value: null, z: null, band: this.bandInForce };
    this.standing.signal(events, 'silent', null, moment, () => this.grounds({ silentAfter, silence: time - since }));
    return events;
  }

  /** A reading that measures nothing: it counts, but takes part in no statistics, as a missing reading takes part in none. */
  private offScale(time: number, value: number): readonly EngineEvent[] {
    const { state, limits, spec } = this;
    state[AT_Z] = NaN;
    state[SILENT] = 0;
    const events: EngineEvent[] = [];
    const moment = this.moment(time, value, null);
    const side = value > limits[RANGE_HIGH]! ? 'high' : value < limits[RANGE_LOW]! ? 'low' : null;
    this.standing.signal(events, 'off-scale', side, moment, () => this.grounds(pair(spec.range)));
    this.standing.settle(events, moment, false);
    return events;
  }

  private settle(time: number, value: number): readonly EngineEvent[] {
    const { baseline, spec, limits } = this;
    const outside = value > limits[TOLERANCE_HIGH]! || value < limits[TOLERANCE_LOW]!;
    const events = outside || this.alarms.length > 0 ? this.report(time, value, null, 0, false, outside) : NONE;
    if (baseline?.take(value) !== true) return events;
    const { index } = this;
    const band = baseline.band(`learned@${index}`, spec.k, spec.resolution);
    baseline.restart();
    if (band) this.establish(band);
    return [...events, { event: 'band', channel: spec.channel, index, time, band, sentence: bandSentence(spec, band) }];
  }

  private establish(band: Band): void {
    const { limits } = this;
    this.bandInForce = band;
    limits[CENTRE] = band.centre;
    limits[SIGMA] = band.sigma;
    if (this.spec.rules.includes('inconsistent')) limits[PREDICTION] = predictionLimit(band);
    this.frozen.judgeBy(band.sigma);
  }

  /** The signals of a reading on the scale, and what they do to the alarms. Only readings that are not quiet come here. */
  private report(time: number, value: number, z: number | null, fired: number, frozen: boolean, outside: boolean): readonly EngineEvent[] {
    const events: EngineEvent[] = [];
    const { spec, standing, patterns, limits, state } = this;
    const moment = this.moment(time, value, z);
    const signal = (detector: Detector, side: Side | null, grounds: () => Grounds): void =>
      standing.signal(events, detector, side, moment, grounds);
    state[SILENT] = 0;
    for (const rule of RULES)
      if (fired & RULE_BIT[rule]) {
        signal(rule, patterns.sideOf(rule), () =>
          this.grounds(
            rule === 'inconsistent'
              ? { prediction: limits[PREDICTION]! }
              : { scale: spec.k / 3, ...(rule === 'eight-one-side' && { sideRun: spec.sideRun }) },
          ),
        );
      }
    if (frozen) signal('frozen', null, () => this.frozenGrounds());
    if (outside) signal('tolerance', value > limits[TOLERANCE_HIGH]! ? 'high' : 'low', () => this.grounds(pair(spec.tolerance)));
    standing.settle(events, moment, true);
    return events;
  }

  private moment(time: number, value: number, z: number | null): Moment {
    return { index: this.index, time, value, z, band: this.bandInForce };
  }

  private grounds(limits: Readonly<Record<string, number>>, lnOdds: number | null = null): Grounds {
    return { limits, readings: this.evidence.list(), lnOdds };
  }

  private frozenGrounds(): Grounds {
    const { repeats, logChance, smallestStep } = this.frozen;
    const limits = { repeats, step: smallestStep ?? NaN, chance: Math.exp(logChance), odds: this.spec.frozenOdds };
    return this.grounds(limits, repeats * logChance);
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
const pair = (limits: readonly [number, number] | null): Record<string, number> => (limits === null ? {} : { low: limits[0], high: limits[1] });
