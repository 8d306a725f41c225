import type { Fault, SourcePhase } from '../../adapters/source.js';
import { clean } from '../text/clean.js';

/** What is known of one source: whether it delivers, in a sentence, and what it sent that was no reading. */
export class SourceState {
  phase: SourcePhase = 'connecting';
  sentence = 'not yet started';
  /** Counts by kind of fault. */
  readonly faults = new Map<Fault, number>();
  /** The newest sample of each kind, cleaned. */
  readonly samples = new Map<Fault, string>();

  constructor(readonly name: string) {}

  fault(kind: Fault, sample: string): void {
    const count = (this.faults.get(kind) ?? 0) + 1;
    this.faults.set(kind, count);
    if (count < 10 || count % 1000 === 0) this.samples.set(kind, clean(sample, 60)); // a flood of faults costs no cleaning
  }

  /** All that was no reading. A retained message is old news and no fault of the source. */
  get faultCount(): number {
    let sum = 0;
    for (const [kind, count] of this.faults) if (kind !== 'stale') sum += count;
    return sum;
  }
}
