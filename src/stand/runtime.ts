import type { Fault, Sink, Source, SourcePhase } from '../../adapters/source.js';
import { Channel } from '../engine/channel.js';
import type { AlarmCleared, AlarmRaised, BandLearned, EngineEvent } from '../engine/events.js';
import type { AlarmLog } from '../record/alarmLog.js';
import { toWire } from '../record/wire.js';
import { clean } from '../text/clean.js';
import type { Clock } from './clock.js';
import { History } from './history.js';
import { tickBefore } from './silence.js';
import { SourceState } from './sourceState.js';
import type { ChannelConfig } from './types.js';

/** Events that are kept: they are on disk before anyone is told. */
export type Kept = AlarmRaised | AlarmCleared | BandLearned;

/** One channel at work: its engine, and what the pictures need. */
export interface Post {
  readonly channel: Channel;
  readonly history: History | null;
  /** Stand time at which the newest reading arrived (its own time may be the instrument's); NaN before the first. */
  arrived: number;
  /** A retained value from before the connection, until a new reading comes. */
  stale: { readonly time: number; readonly value: number } | null;
}

export interface RuntimeOptions {
  readonly channels: readonly ChannelConfig[];
  readonly sources: readonly Source[];
  /** Names of sources whose readings bring their own, possibly long past, time: silence is judged by that time alone. */
  readonly ownTime: ReadonlySet<string>;
  readonly log: AlarmLog | null;
  /** Readings kept for pictures by channel; 0: none. */
  readonly history: number;
  /** Told of each kept event once it is durable (at once where there is no log). */
  readonly onKept: (event: Kept) => void;
  readonly onPhase: (source: SourceState) => void;
  readonly clock: Clock;
}

const TICK = 100; // ms between looks for silence
const FOLLOW = 10_000; // ms between comparisons with the system clock
const BACKLOG = 2000; // events not yet on disk beyond which files and pipes are held back

/**
 * Joins sources, engines and the alarm log: each reading goes through its channel's engine at once, and what comes of
 * it reaches the disk before it is shown to anyone.
 */
export class Runtime {
  readonly posts: readonly Post[];
  readonly sources: readonly SourceState[];
  readonly clock: Clock;
  /** Readings of all channels so far. */
  readings = 0;
  private undurable = 0;
  private timers: NodeJS.Timeout[] = [];
  private readonly live: boolean[];
  private stopping: Promise<void> | null = null;

  constructor(private readonly options: RuntimeOptions) {
    this.clock = options.clock;
    this.posts = options.channels.map(({ spec }) => ({
      channel: new Channel(spec),
      history: options.history > 0 ? new History(options.history) : null,
      arrived: NaN,
      stale: null,
    }));
    this.live = options.channels.map(({ origin }) => !options.ownTime.has(origin.source));
    this.sources = options.sources.map((source) => new SourceState(source.name));
  }

  start(): void {
    this.options.sources.forEach((source, i) => source.start(this.sink(this.sources[i]!)));
    this.timers = [
      setInterval(() => this.tick(), TICK),
      setInterval(() => this.clock.follow(), FOLLOW),
    ];
  }

  /** Resolves when every source has ended by itself. */
  async ended(): Promise<void> {
    await Promise.all(this.options.sources.map((source) => source.ended));
  }

  /** Stops the sources, then puts what is left on disk. Safe to call twice. */
  stop(): Promise<void> {
    this.stopping ??= (async () => {
      for (const timer of this.timers) clearInterval(timer);
      await Promise.allSettled(this.options.sources.map((source) => source.stop()));
      await this.options.log?.close();
    })();
    return this.stopping;
  }

  /** Looks for silent channels. The instrument's clock may differ from ours: silence is counted from the arrival. */
  private tick(): void {
    const now = this.clock.now();
    this.posts.forEach((post, slot) => {
      if (!this.live[slot]) return;
      const last = post.channel.lastTime;
      const time = last === null || Number.isNaN(post.arrived) ? now : last + (now - post.arrived);
      const events = post.channel.tick(time);
      if (events.length > 0) this.keep(events);
    });
  }

  private keep(events: readonly EngineEvent[]): void {
    for (const event of events) {
      if (event.event === 'signal') continue; // an alarm carries it
      const { log, onKept } = this.options;
      if (!log) {
        onKept(event);
        continue;
      }
      this.undurable++;
      log.append(toWire(event), () => {
        this.undurable--;
        onKept(event);
      });
    }
  }

  private sink(state: SourceState): Sink {
    const { clock, posts } = this;
    const watchGaps = this.options.ownTime.has(state.name);
    return {
      reading: (slot: number, time: number, value: number) => {
        const post = posts[slot]!;
        if (watchGaps) this.keep(tickBefore(post.channel, time));
        const events = post.channel.take(time, value);
        post.arrived = clock.now();
        post.stale = null;
        this.readings++;
        if (post.history !== null && Number.isFinite(value)) post.history.push(time, value);
        if (events.length > 0) this.keep(events);
      },
      stale: (slot: number, time: number, value: number) => {
        const post = posts[slot]!;
        if (post.channel.index < 0) post.stale = { time, value };
      },
      phase: (phase: SourcePhase, sentence: string) => {
        state.phase = phase;
        state.sentence = clean(sentence, 300);
        this.options.onPhase(state);
      },
      fault: (fault: Fault, sample: string) => state.fault(fault, sample),
      durable: () => this.options.log?.durable() ?? Promise.resolve(),
      pressure: () => (this.undurable > BACKLOG && this.options.log ? this.options.log.durable() : null),
      now: () => clock.now(),
    };
  }
}
