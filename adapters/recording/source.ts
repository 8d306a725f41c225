import { setImmediate as turn } from 'node:timers/promises';
import { clean } from '../../src/text/clean.js';
import { UserError } from '../../src/text/errors.js';
import type { RecordingOptions } from '../options.js';
import type { Sink, Source, Wanted } from '../source.js';
import { recordingBytes } from './bytes.js';
import { RecordingReader } from './reader.js';

const SLICE = 1 << 16; // bytes between looks at whether the sink wants a pause or the source was stopped

/**
 * Readings from a file: CSV with a header or JSON Lines, plain or gzip, as fast as the sink takes them. It ends with
 * the file.
 */
export function recordingSource(name: string, options: RecordingOptions, wanted: readonly Wanted[]): Source {
  return new RecordingSource(name, options, wanted);
}

class RecordingSource implements Source {
  readonly ended: Promise<void>;
  private finished!: () => void;
  private stopped = false;
  private halt!: () => void;
  private readonly halted: Promise<void>;
  private running: Promise<void> | null = null;

  constructor(
    readonly name: string,
    private readonly options: RecordingOptions,
    private readonly wanted: readonly Wanted[],
  ) {
    this.ended = new Promise((resolve) => (this.finished = resolve));
    this.halted = new Promise((resolve) => (this.halt = resolve));
  }

  start(sink: Sink): void {
    if (this.running || this.stopped) return;
    this.running = this.run(sink).finally(this.finished);
  }

  async stop(): Promise<void> {
    this.stopped = true;
    this.halt();
    await this.running;
    this.finished();
  }

  private async run(sink: Sink): Promise<void> {
    const file = clean(this.options.path, 200);
    try {
      await turn();
      const bytes = await recordingBytes(this.options.path);
      if (!this.stopped) sink.phase('open', `Reading ${file}.`);
      const reader = new RecordingReader(
        this.wanted,
        {
          reading: (slot, time, value) => sink.reading(slot, time, value),
          fault: (fault, sample) => sink.fault(fault, sample),
        },
        this.options.path,
      );
      for await (const chunk of bytes.chunks) {
        for (let at = 0; at < chunk.length && !this.stopped; at += SLICE) {
          reader.push(chunk.subarray(at, at + SLICE));
          const pressure = sink.pressure();
          if (pressure) await Promise.race([pressure.catch(() => undefined), this.halted]);
          else await turn();
        }
        if (this.stopped) break;
        sink.progress?.(bytes.fraction());
      }
      if (this.stopped) sink.phase('stopped', `${file} is no longer read.`);
      else {
        reader.end(bytes.torn() !== null);
        sink.phase('ended', bytes.torn() ?? `${file} has been read to its end.`);
      }
    } catch (error) {
      const why = error instanceof UserError ? error.message : `${file} cannot be read further: ${clean((error as Error).message, 120)}.`;
      sink.phase(this.stopped ? 'stopped' : 'ended', clean(why, 500));
    }
  }
}
