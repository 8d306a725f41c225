import type { Readable } from 'node:stream';
import { clean } from '../../src/text/clean.js';
import { LineFeed } from '../decoding/lineFeed.js';
import type { StdinOptions } from '../options.js';
import type { Sink, Source, SourcePhase, Wanted } from '../source.js';

/**
 * Readings from lines on a stream, such as `some-logger | kilter watch stand.yaml`. Nothing is dropped: the first line
 * counts, and so does a last line without an end. The stream is read no faster than the sink allows. The source ends
 * with the stream.
 * @throws UserError where a channel wants what the lines cannot hold
 */
export function stdinSource(
  name: string,
  options: StdinOptions,
  wanted: readonly Wanted[],
  stream: Readable = process.stdin,
): Source {
  return new StdinSource(name, new LineFeed(options, wanted), stream);
}

class StdinSource implements Source {
  readonly ended: Promise<void>;
  private finished!: () => void;
  private sink: Sink | null = null;
  private done = false;

  constructor(
    readonly name: string,
    private readonly feed: LineFeed,
    private readonly stream: Readable,
  ) {
    this.ended = new Promise((resolve) => (this.finished = resolve));
  }

  start(sink: Sink): void {
    if (this.sink || this.done) return;
    this.sink = sink;
    this.feed.open(sink, false);
    setImmediate(() => {
      if (this.done) return;
      sink.phase('open', 'Reading lines from standard input.');
      this.stream.on('data', this.take).once('end', this.end).once('close', this.torn).on('error', this.fail);
      if (this.stream.readableEnded || this.stream.destroyed) this.end();
    });
  }

  stop(): Promise<void> {
    if (!this.done) this.finish('stopped', 'Standard input is no longer read.');
    return Promise.resolve();
  }

  private readonly take = (chunk: Buffer | string): void => {
    this.feed.push(typeof chunk === 'string' ? Buffer.from(chunk) : chunk);
    const pressure = this.sink?.pressure();
    if (!pressure) return;
    this.stream.pause();
    const go = (): void => {
      if (!this.done) this.stream.resume();
    };
    pressure.then(go, go);
  };

  private readonly end = (): void => {
    if (this.done) return;
    this.feed.end();
    this.finish('ended', 'Standard input has ended.');
  };

  /** Closed before its end: what was begun of a line is no line. */
  private readonly torn = (): void => {
    if (!this.done) this.finish('ended', 'Standard input was closed before its end.');
  };

  private readonly fail = (error: Error): void => {
    if (this.done) return;
    this.finish('ended', `Standard input failed: ${clean(error.message, 120)}.`);
  };

  private finish(phase: SourcePhase, sentence: string): void {
    this.done = true;
    this.stream.off('data', this.take).off('end', this.end).off('close', this.torn);
    this.stream.pause();
    this.feed.close();
    this.sink?.phase(phase, sentence);
    this.sink = null;
    this.finished();
  }
}
