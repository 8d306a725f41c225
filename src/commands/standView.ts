import type { Channel } from '../engine/channel.js';
import type { AlarmRaised } from '../engine/events.js';
import type { AlarmView, ChannelView, StandView } from '../screen/model.js';
import type { AlarmBook } from '../stand/alarmBook.js';
import type { Post, Runtime } from '../stand/runtime.js';
import { twoSided } from '../stats/normal.js';

/** Makes the screen's view model from the runtime, once a frame. Buffers are kept from frame to frame. */
export class StandViewer {
  private readonly trends: { values: Float64Array; times: Float64Array }[];
  private selected: string | null = null;
  private readonly channels: ReadonlyMap<string, Channel>;
  private rateAt: number;
  private rateCount = 0;
  private rate = 0;
  logTrouble: string | null = null;

  /**
   * @param trend readings of each channel that a picture may show
   * @param notice lasting words for the status line; asked at each frame
   */
  constructor(
    private readonly stand: string,
    private readonly runtime: Runtime,
    private readonly book: AlarmBook,
    trend: number,
    private readonly notice: () => string | null,
  ) {
    this.trends = runtime.posts.map(() => ({ values: new Float64Array(trend), times: new Float64Array(trend) }));
    this.rateAt = runtime.clock.now();
    this.channels = new Map(runtime.posts.map(({ channel }) => [channel.spec.channel, channel]));
  }

  select(channel: string): void {
    this.selected = channel;
  }

  view(): StandView {
    const { runtime, book } = this;
    const now = runtime.clock.now();
    this.measureRate(now);
    const alarms = book.list().map(
      ({ raised, cleared }): AlarmView => ({
        alarm: raised.alarm,
        channel: raised.channel,
        detector: raised.detector,
        side: raised.side,
        sentence: raised.sentence,
        odds: raised.odds,
        since: raised.time,
        signals: cleared?.signals ?? this.signalsSoFar(raised),
        clearedAt: cleared?.time ?? null,
      }),
    );
    return {
      stand: this.stand,
      now,
      channels: runtime.posts.map((post, slot) => this.channel(post, slot)),
      alarms,
      sources: runtime.sources.map(({ name, phase, sentence, faultCount }) => ({ source: name, phase, sentence, faults: faultCount })),
      rate: this.rate,
      logTrouble: this.logTrouble,
      notice: this.notice(),
    };
  }

  private channel(post: Post, slot: number): ChannelView {
    const { channel, history, stale } = post;
    const { values, times } = this.trends[slot]!;
    const { spec, z } = channel;
    const isSelected = spec.channel === this.selected;
    const alarmed = this.book.stands(spec.channel);
    return {
      channel: spec.channel,
      unit: spec.unit,
      state: alarmed ? 'alarm' : channel.index < 0 ? 'waiting' : channel.settled ? 'settling' : 'normal',
      settled: channel.settled,
      index: channel.index,
      time: stale ? stale.time : channel.lastTime,
      value: stale ? stale.value : channel.value,
      stale: stale !== null,
      z,
      odds: z === null ? null : twoSided(z),
      band: channel.band,
      tolerance: spec.tolerance,
      resolution: spec.resolution,
      trend: values,
      trendTimes: times,
      trendLength: history?.copy(values, times) ?? 0,
      window: isSelected ? channel.statistics() : null,
      lag1: isSelected ? channel.lag1() : null,
    };
  }

  private signalsSoFar({ channel, alarm }: AlarmRaised): number {
    return this.channels.get(channel)?.alarms.find((active) => active.alarm === alarm)?.signals ?? 1;
  }

  private measureRate(now: number): void {
    const elapsed = now - this.rateAt;
    if (elapsed < 1000) return;
    this.rate = ((this.runtime.readings - this.rateCount) * 1000) / elapsed;
    this.rateAt = now;
    this.rateCount = this.runtime.readings;
  }
}
