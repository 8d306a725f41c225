import { setImmediate as turn, setTimeout as sleep } from 'node:timers/promises';
import { clean } from '../../src/text/clean.js';
import { UserError } from '../../src/text/errors.js';
import type { SimulatedOptions } from '../options.js';
import type { Sink, Source, Wanted } from '../source.js';
import { INSTRUMENTS, instrumentAt, readingAt } from './cell.js';
import { EVERY } from './schedule.js';

const AT_ONCE = 200; // steps between turns of the event loop, as fast as it goes

/**
 * The simulated coolant-pump cell without a transport: in real time, faster, or as fast as it goes. A channel's field (or
 * its name) is one of flow, inlet, outlet, bearing, vibration, supply. It never ends by itself.
 * @throws UserError where a channel wants an instrument that the cell has not
 */
export function simulatedSource(name: string, options: SimulatedOptions, wanted: readonly Wanted[]): Source {
  const taps = wanted.map(({ slot, field, channel }) => {
    const instrument = instrumentAt(field ?? channel);
    if (instrument < 0)
      throw new UserError(
        `The simulated cell has no instrument '${clean(field ?? channel, 60)}'.`,
        `It has: ${INSTRUMENTS.map((candidate) => candidate.channel).join(', ')}.`,
      );
    return { slot, instrument };
  });
  return new SimulatedSource(name, options, taps);
}

class SimulatedSource implements Source {
  readonly ended: Promise<void>;
  private finished!: () => void;
  private readonly stopper = new AbortController();
  private running: Promise<void> | null = null;

  constructor(
    readonly name: string,
    private readonly options: SimulatedOptions,
    private readonly taps: readonly { slot: number; instrument: number }[],
  ) {
    this.ended = new Promise((resolve) => (this.finished = resolve));
  }

  start(sink: Sink): void {
    if (this.running || this.stopper.signal.aborted) return;
    this.running = this.run(sink);
  }

  async stop(): Promise<void> {
    this.stopper.abort();
    await this.running;
    this.finished();
  }

  private async run(sink: Sink): Promise<void> {
    const { signal } = this.stopper;
    const stopped = (): boolean => signal.aborted; // it changes while we wait
    await turn();
    if (stopped()) return;
    sink.phase('open', 'The simulated cell is running.');
    const began = sink.now();
    const { speed } = this.options;
    for (let step = 0; !stopped(); step++) {
      if (speed > 0) {
        const wait = began + (step * EVERY) / speed - sink.now();
        if (wait > 0) await sleep(wait, undefined, { signal }).catch(() => undefined);
        else if (step % AT_ONCE === 0) await turn(); // behind its time, it still leaves others theirs
        if (stopped()) break;
      } else if (step % AT_ONCE === 0) await (sink.pressure() ?? turn());
      this.deliver(sink, step, speed > 0 ? sink.now() : began + step * EVERY);
      if (speed > 0) await sink.pressure();
    }
    sink.phase('stopped', 'The simulated cell has been stopped.');
  }

  private deliver(sink: Sink, step: number, time: number): void {
    const { seed, faults } = this.options;
    for (const { slot, instrument } of this.taps) {
      const value = readingAt(seed, instrument, step, faults);
      if (value !== null) sink.reading(slot, time, value);
    }
  }
}
