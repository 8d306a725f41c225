import { LineSplitter } from '../framing/lineSplitter.js';
import type { LineOptions } from '../options.js';
import type { Fault, Sink, Wanted } from '../source.js';
import { compileDecoder, type LineDecoder } from './lineDecoder.js';

const SAMPLE = 120; // bytes of a refused line handed on

/** What hears of whole lines beside the sink, for a judgement of the transport. */
interface LineWatch {
  good(length: number): void;
  refused(bytes: Buffer, start: number, end: number): void;
}

/**
 * From the bytes of a transport to readings in a sink: splitting and decoding joined. All lines of a chunk share one
 * time of arrival, the sink's, taken when the chunk is.
 */
export class LineFeed {
  private readonly splitter: LineSplitter;
  private readonly decoder: LineDecoder;
  private readonly slots: readonly number[];
  private sink: Sink | null = null;
  private arrival = 0;

  /** @throws UserError where a channel wants what the lines cannot hold */
  constructor(options: LineOptions, wanted: readonly Wanted[], watch?: LineWatch) {
    this.decoder = compileDecoder(options, wanted);
    this.slots = wanted.map(({ slot }) => slot);
    const emit = (want: number, value: number, time: number): void =>
      this.sink?.reading(this.slots[want]!, Number.isNaN(time) ? this.arrival : time, value);
    const refuse = (fault: Fault, bytes: Buffer, start: number, end: number): void =>
      this.sink?.fault(fault, bytes.toString('utf8', start, Math.min(end, start + SAMPLE)));
    this.splitter = new LineSplitter(options.maxLine, {
      line: (bytes, start, end) => {
        watch?.good(end - start);
        this.decoder.decode(bytes, start, end, emit, refuse);
      },
      refused: (fault, bytes, start, end) => {
        refuse(fault, bytes, start, end);
        watch?.refused(bytes, start, end);
      },
    });
  }

  /**
   * A new stream begins.
   * @param dropFirst whether it may begin in the middle of a line
   */
  open(sink: Sink, dropFirst: boolean): void {
    this.sink = sink;
    this.splitter.reset(dropFirst);
  }

  push(chunk: Buffer): void {
    if (!this.sink) return;
    this.arrival = this.sink.now();
    this.splitter.push(chunk);
  }

  /** The stream has ended; a last line without an end counts. */
  end(): void {
    if (this.sink) this.arrival = this.sink.now();
    this.splitter.end();
    this.close();
  }

  /** Forgets what was begun and the sink. */
  close(): void {
    this.splitter.reset(false);
    this.sink = null;
  }
}
