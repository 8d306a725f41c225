import { clean } from '../../src/text/clean.js';
import { LineFeed } from '../decoding/lineFeed.js';
import { Legibility } from '../framing/legibility.js';
import type { SerialOptions } from '../options.js';
import type { Sink, Source, SourcePhase, Wanted } from '../source.js';
import { Connection } from './connection.js';
import { lockHolder } from './lock.js';
import { whoHasIt, whyNotOpen } from './trouble.js';

/**
 * Readings from lines on a serial port. The port may come late, go and come back: it is opened again and again,
 * with a wait that doubles from `retryFrom` to `retryTo` (ms) and varies by a quarter, so that many do not knock at the same
 * time. After every opening the first line is dropped, since it may be the end of a torn one. The port is locked against
 * other programs that ask for the lock. What is wrong is said in a sentence through `phase`.
 * @throws UserError where a channel wants what the lines cannot hold
 */
export function serialSource(name: string, options: SerialOptions, wanted: readonly Wanted[]): Source {
  return new SerialSource(name, options, wanted);
}

class SerialSource implements Source {
  readonly ended: Promise<void>;
  private finished!: () => void;
  private readonly feed: LineFeed;
  private readonly legibility = new Legibility();
  private readonly label: string;
  private readonly settings: string;
  private sink: Sink | null = null;
  private connection: Connection | null = null;
  private retry: NodeJS.Timeout | null = null;
  private wait: number;
  private wasOpen = false;
  private isOpen = false;
  private said = '';
  private stopping: Promise<void> | null = null;

  constructor(
    readonly name: string,
    private readonly options: SerialOptions,
    wanted: readonly Wanted[],
  ) {
    const { path, baudRate, dataBits, parity, stopBits } = options;
    this.ended = new Promise((resolve) => (this.finished = resolve));
    this.label = clean(path, 120);
    this.settings = `${baudRate} baud ${dataBits}${parity[0]!.toUpperCase()}${stopBits}`;
    this.wait = options.retryFrom;
    this.feed = new LineFeed(options, wanted, {
      good: (length) => {
        if (this.legibility.good(length)) this.say('open', `${this.label} can be read again.`);
      },
      refused: (bytes, start, end) => {
        if (this.legibility.refused(bytes, start, end)) this.unread(bytes.toString('latin1', start, Math.min(end, start + 40)));
      },
    });
  }

  start(sink: Sink): void {
    if (this.sink || this.stopping) return;
    this.sink = sink;
    this.retry = setTimeout(this.open, 0);
  }

  stop(): Promise<void> {
    return (this.stopping ??= this.close());
  }

  private readonly open = (): void => {
    if (this.said === '') this.say('connecting', `Opening ${this.label} at ${this.settings}.`);
    void lockHolder(this.options.path).then((holder) => {
      if (this.stopping) return;
      if (holder) this.refused(whoHasIt(this.label, holder));
      else this.connect();
    });
  };

  private connect(): void {
    const { path, parity } = this.options;
    const refused = (error: Error): void => this.refused(whyNotOpen(path, error));
    try {
      this.connection = new Connection(this.options, {
        opened: () => this.opened(),
        refused,
        data: (chunk) => {
          this.wait = this.options.retryFrom; // not before: a port that opens and fails at once is not tried at full pace
          this.feed.push(chunk);
        },
        lost: (what) => this.lost(what),
        unmarked: () => {
          if (parity !== 'none')
            this.say('open', `${this.label} is open, but bytes with parity errors cannot be told: stty did not set -ignpar.`);
        },
      });
    } catch (error) {
      refused(error as Error);
    }
  }

  private opened(): void {
    if (!this.sink) return;
    this.isOpen = this.wasOpen = true;
    this.legibility.reset();
    this.feed.open(this.sink, true);
    this.say('open', `${this.label} is open at ${this.settings}.`);
  }

  private lost(what: string): void {
    this.isOpen = false;
    this.feed.close();
    this.say('lost', `${this.label} ${what}. Trying to open it again.`);
    this.later();
  }

  private refused(why: string | Promise<string>): void {
    this.later();
    void Promise.resolve(why).then((sentence) => {
      if (!this.stopping && !this.isOpen) this.say(this.wasOpen ? 'lost' : 'connecting', `${sentence} Trying again.`);
    });
  }

  private later(): void {
    if (this.stopping) return;
    this.retry = setTimeout(this.open, this.wait * (0.75 + Math.random() * 0.5));
    this.wait = Math.min(this.wait * 2, this.options.retryTo);
  }

  private unread(sample: string): void {
    this.sink?.fault('unread', sample);
    this.say('open', `Most of what ${this.label} sends cannot be read at ${this.settings}. Check baudRate, dataBits and parity.`);
  }

  /** Says what has changed, once. */
  private say(phase: SourcePhase, sentence: string): void {
    if (this.said === phase + sentence) return;
    this.said = phase + sentence;
    this.sink?.phase(phase, sentence);
  }

  private async close(): Promise<void> {
    if (this.retry) clearTimeout(this.retry);
    this.feed.close();
    await this.connection?.close();
    this.say('stopped', `${this.label} is closed.`);
    this.sink = null;
    this.finished();
  }
}
