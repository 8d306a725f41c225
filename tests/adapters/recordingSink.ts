import { setTimeout as sleep } from 'node:timers/promises';
import type { Fault, Sink, SourcePhase } from '../../adapters/source.js';

interface Delivered {
  readonly slot: number;
  readonly time: number;
  readonly value: number;
}

/** A sink that keeps what it was given, and knows of calls after it was closed. For a few hundred thousand readings. */
export class RecordingSink implements Sink {
  readonly readings: Delivered[] = [];
  readonly staleReadings: Delivered[] = [];
  readonly phases: { readonly phase: SourcePhase; readonly sentence: string }[] = [];
  readonly faults: { readonly fault: Fault; readonly sample: string }[] = [];
  /** Names of the methods that were called after {@link close}. */
  readonly late: string[] = [];
  private closed = false;
  private clock = 0;

  /** @param hold whether {@link pressure} holds the source back, for a turn of the event loop at every asking */
  constructor(private readonly hold = false) {}

  reading(slot: number, time: number, value: number): void {
    this.seen('reading');
    this.readings.push({ slot, time, value });
  }

  stale(slot: number, time: number, value: number): void {
    this.seen('stale');
    this.staleReadings.push({ slot, time, value });
  }

  phase(phase: SourcePhase, sentence: string): void {
    this.seen('phase');
    this.phases.push({ phase, sentence });
  }

  fault(fault: Fault, sample: string): void {
    this.seen('fault');
    this.faults.push({ fault, sample });
  }

  progress(): void {
    this.seen('progress');
  }

  durable(): Promise<void> {
    this.seen('durable');
    return Promise.resolve();
  }

  pressure(): Promise<void> | null {
    this.seen('pressure');
    return this.hold ? sleep(1) : null;
  }

  now(): number {
    this.seen('now');
    this.clock = Math.max(this.clock, Date.now());
    return this.clock;
  }

  /** From now on every call is late. */
  close(): void {
    this.closed = true;
  }

  /** The values delivered under a slot, oldest first. */
  values(slot = 0): number[] {
    return this.readings.filter((reading) => reading.slot === slot).map((reading) => reading.value);
  }

  /** How often a fault was counted. */
  count(fault: Fault): number {
    return this.faults.filter((seen) => seen.fault === fault).length;
  }

  /** Whether the source's newest phase is the given one. */
  is(phase: SourcePhase): boolean {
    return this.phases.at(-1)?.phase === phase;
  }

  private seen(method: string): void {
    if (this.closed) this.late.push(method);
  }
}

/**
 * Waits until a condition holds.
 * @throws Error with the description when it does not within the time (ms)
 */
export async function until(holds: () => boolean, what: string, within = 15_000): Promise<void> {
  const deadline = performance.now() + within;
  while (!holds()) {
    if (performance.now() > deadline) throw new Error(`Waited ${within} ms in vain until ${what}.`);
    await sleep(5);
  }
}
