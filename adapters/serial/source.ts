import type { ChildProcess } from 'node:child_process';
import { SerialPort } from 'serialport';
import { clean } from '../../src/text/clean.js';
import { LineFeed } from '../decoding/lineFeed.js';
import { Legibility } from '../framing/legibility.js';
import type { SerialOptions } from '../options.js';
import type { Sink, Source, SourcePhase, Wanted } from '../source.js';
import { hangUpBinding } from './binding.js';
import { lockHolder } from './lock.js';
import { markParityErrors } from './parityMarks.js';
import { whoHasIt, whyNotOpen } from './trouble.js';

const STOP_WITHIN = 800; // ms that closing may take
const PROBE_EVERY = 5000; // ms without a byte until the driver is asked whether the line is still there
const CHUNK = 65_536; // bytes read at most at once

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
  private sink: Sink | null = null;
  private port: SerialPort | null = null;
  private retry: NodeJS.Timeout | null = null;
  private probe: NodeJS.Timeout | null = null;
  private stty: ChildProcess | null = null;
  private wait: number;
  private heard = false;
  private wasOpen = false;
  private said = '';
  private stopping: Promise<void> | null = null;
  /** Takes the port, if it did open, whose opening was under way at the stop. */
  private abandoned: ((port: SerialPort | null) => void) | null = null;

  constructor(
    readonly name: string,
    private readonly options: SerialOptions,
    wanted: readonly Wanted[],
  ) {
    this.ended = new Promise((resolve) => (this.finished = resolve));
    this.label = clean(options.path, 120);
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
    if (this.said === '') this.say('connecting', `Opening ${this.label} at ${this.settings()}.`);
    void lockHolder(this.options.path).then((holder) => {
      if (this.stopping) return;
      if (holder) this.refusedOpening(whoHasIt(this.label, holder));
      else this.connect();
    });
  };

  private connect(): void {
    const { path, baudRate, dataBits, parity, stopBits } = this.options;
    let port: SerialPort;
    try {
      // A new object for every opening: one whose stream has failed would open again but never read.
      const binding = { binding: hangUpBinding } as object;
      port = new SerialPort({ path, baudRate, dataBits, parity, stopBits, hupcl: false, autoOpen: false, highWaterMark: CHUNK, ...binding });
    } catch (error) {
      this.refusedOpening(whyNotOpen(path, error as Error));
      return;
    }
    this.port = port;
    port.on('error', () => undefined); // closing with work in hand emits one, which must not end the process
    port.on('data', (chunk: Buffer) => this.take(port, chunk));
    port.once('close', () => this.lost(port, 'was unplugged or hung up'));
    port.open((error) => {
      if (this.stopping) this.abandoned?.(error ? null : port);
      else if (error) {
        this.port = null;
        this.refusedOpening(whyNotOpen(path, error));
      } else this.opened(port);
    });
  }

  private opened(port: SerialPort): void {
    if (!this.sink) return;
    this.wasOpen = true;
    this.legibility.reset();
    this.feed.open(this.sink, true);
    this.stty = markParityErrors(this.options.path, (succeeded) => {
      if (!succeeded && port === this.port && this.options.parity !== 'none')
        this.say('open', `${this.label} is open, but bytes with parity errors cannot be told: stty did not set -ignpar.`);
    });
    this.heard = true;
    this.probe = setInterval(() => this.ask(port), PROBE_EVERY);
    this.say('open', `${this.label} is open at ${this.settings()}.`);
  }

  private take(port: SerialPort, chunk: Buffer): void {
    if (port !== this.port) return;
    this.heard = true;
    this.wait = this.options.retryFrom; // not before: a port that opens and fails at once must not be tried at full pace
    this.feed.push(chunk);
  }

  /** A line can die without any event: a silent one is asked for its modem lines, which fails on a dead one. */
  private ask(port: SerialPort): void {
    if (this.heard) {
      this.heard = false;
      return;
    }
    port.get((error) => {
      if (error && port === this.port && isDead(error)) this.lost(port, `no longer answers (${clean(error.message, 80)})`);
    });
  }

  private lost(port: SerialPort, what: string): void {
    if (port !== this.port) return;
    this.release();
    if (port.isOpen) port.close(() => undefined);
    this.say('lost', `${this.label} ${what}. Trying to open it again.`);
    this.later();
  }

  private refusedOpening(why: string | Promise<string>): void {
    this.later();
    void Promise.resolve(why).then((sentence) => {
      if (this.stopping || this.port?.isOpen) return;
      this.say(this.wasOpen ? 'lost' : 'connecting', `${sentence} Trying again.`);
    });
  }

  private later(): void {
    if (this.stopping) return;
    this.retry = setTimeout(this.open, this.wait * (0.75 + Math.random() * 0.5));
    this.wait = Math.min(this.wait * 2, this.options.retryTo);
  }

  private unread(sample: string): void {
    this.sink?.fault('unread', sample);
    this.say('open', `Most of what ${this.label} sends cannot be read at ${this.settings()}. Check baudRate, dataBits and parity.`);
  }

  /** Says what has changed, once. */
  private say(phase: SourcePhase, sentence: string): void {
    if (this.said === phase + sentence) return;
    this.said = phase + sentence;
    this.sink?.phase(phase, sentence);
  }

  private settings(): string {
    const { baudRate, dataBits, parity, stopBits } = this.options;
    return `${baudRate} baud ${dataBits}${parity[0]!.toUpperCase()}${stopBits}`;
  }

  /** Lets go of the port and of what belonged to it. */
  private release(): void {
    this.port = null;
    if (this.probe) clearInterval(this.probe);
    this.probe = null;
    this.stty?.kill();
    this.stty = null;
    this.feed.close();
  }

  private async close(): Promise<void> {
    if (this.retry) clearTimeout(this.retry);
    const port = this.port;
    this.release();
    if (port) {
      let timer: NodeJS.Timeout | undefined;
      const late = new Promise<void>((resolve) => (timer = setTimeout(resolve, STOP_WITHIN)));
      await Promise.race([this.shut(port), late]);
      clearTimeout(timer);
    }
    this.say('stopped', `${this.label} is closed.`);
    this.sink = null;
    this.finished();
  }

  private async shut(port: SerialPort): Promise<void> {
    const open = port.isOpen ? port : await new Promise<SerialPort | null>((resolve) => (this.abandoned = resolve));
    if (open) await new Promise<void>((resolve) => open.close(() => resolve()));
  }
}

/** A pseudo-terminal has no modem lines, and some adapters none either: only these errors mean that the line is gone. */
function isDead(error: Error): boolean {
  return /input\/output|no such device|bad file/i.test(error.message);
}
