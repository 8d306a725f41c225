import { twoSided } from '../stats/normal.js';
import { alarmId, type ActiveAlarm } from './alarm.js';
import type { Band } from './band.js';
import type { AlarmRaised, EngineEvent, EvidenceReading } from './events.js';
import type { Detector, Side } from './rules.js';
import type { ChannelSpec } from './spec.js';
import { clearedSentence, raisedSentence } from './words.js';

/** One reading, or one look at the clock, as signals are reported of it. */
export interface Moment {
  readonly index: number;
  /** ms since the epoch */
  readonly time: number;
  /** null: no reading (silence) */
  readonly value: number | null;
  /** null: no band, or off the scale */
  readonly z: number | null;
  readonly band: Band | null;
}

/** What a detector judged by, for the evidence and the sentence of an alarm. */
export interface Grounds {
  readonly limits: Readonly<Record<string, number>>;
  readonly readings: readonly EvidenceReading[];
  /** ln of the probability that noise alone does this, where it is not that of z (`frozen`) */
  readonly lnOdds: number | null;
}

/** The standing alarms of one channel: one at a time for each detector. */
export class Alarms {
  /** Oldest first. */
  standing: ActiveAlarm[] = [];

  constructor(private readonly spec: ChannelSpec) {}

  get none(): boolean {
    return this.standing.length === 0;
  }

  /** A signal raises an alarm, or carries on the one that stands. @param grounds asked for only when it raises */
  signal(events: EngineEvent[], detector: Detector, side: Side | null, moment: Moment, grounds: () => Grounds): void {
    const { channel } = this.spec;
    const { index, time, z } = moment;
    const value = finite(moment.value);
    events.push({ event: 'signal', channel, index, time, detector, side, value, z });
    const standing = this.standing.find((alarm) => alarm.detector === detector);
    if (standing) {
      standing.signals++;
      standing.calm = -1;
      return;
    }
    const alarm = alarmId(channel, detector, time, index);
    this.standing.push({ alarm, detector, side, raisedIndex: index, raisedTime: time, signals: 1, calm: -1 });
    events.push(this.raised(alarm, detector, side, moment, grounds()));
  }

  private raised(alarm: string, detector: Detector, side: Side | null, moment: Moment, grounds: Grounds): AlarmRaised {
    const { spec } = this;
    const { index, time, value, z, band } = moment;
    const { limits, readings, lnOdds } = grounds;
    const odds = lnOdds !== null ? Math.exp(lnOdds) : z === null ? null : twoSided(z);
    return {
      event: 'raised',
      alarm,
      channel: spec.channel,
      unit: spec.unit,
      index,
      time,
      detector,
      side,
      value: finite(value),
      z,
      odds,
      evidence: { band, limits, readings },
      sentence: raisedSentence(spec, { detector, side, value, z, odds, band, lnOdds, limits }),
    };
  }

  /**
   * What a reading does to the alarms that it did not signal: so many calm ones in a row clear an alarm. Calm is a
   * reading on the scale and within the control limits; for `tolerance` and `off-scale` the limits do not matter.
   * To be called after the signals of the reading.
   */
  settle(events: EngineEvent[], moment: Moment, onScale: boolean): void {
    const { k, clearAfter } = this.spec;
    const within = moment.z === null || Math.abs(moment.z) <= k;
    for (const alarm of [...this.standing]) {
      if (alarm.detector === 'silent') this.clear(events, alarm, moment); // the channel speaks
      else if (alarm.calm < 0) alarm.calm = 0; // signalled at this very reading
      else if (!onScale || !(within || alarm.detector === 'tolerance' || alarm.detector === 'off-scale')) alarm.calm = 0;
      else if (++alarm.calm >= clearAfter) this.clear(events, alarm, moment);
    }
  }

  private clear(events: EngineEvent[], { alarm, detector, raisedTime, signals }: ActiveAlarm, moment: Moment): void {
    const { index, time, z } = moment;
    this.standing = this.standing.filter((other) => other.alarm !== alarm);
    const lasted = time - raisedTime;
    events.push({
      event: 'cleared',
      alarm,
      channel: this.spec.channel,
      detector,
      index,
      time,
      value: finite(moment.value),
      z,
      signals,
      lasted,
      sentence: clearedSentence(this.spec, detector, lasted, signals),
    });
  }
}

const finite = (x: number | null): number | null => (x !== null && Number.isFinite(x) ? x : null);
