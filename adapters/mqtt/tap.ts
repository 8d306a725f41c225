import { readJsonNumber, readNumber } from '../decoding/number.js';
import { follow, parsePointer, type Pointer } from '../decoding/pointer.js';
import { readJsonTime } from '../decoding/time.js';
import type { Fault, Wanted } from '../source.js';
import { SequenceGate } from './sequenceGate.js';

const MOST_GATES = 1000; // topics of one filter whose sequence numbers are remembered, a kilobyte each

/** One channel's way into a payload, compiled. */
export class Tap {
  readonly slot: number;
  /** Whether the payload must be JSON; else it is the number itself. */
  readonly needsJson: boolean;
  private readonly value: Pointer | null;
  private readonly time: Pointer | null;
  private readonly sequence: Pointer | null;
  private readonly gates = new Map<string, SequenceGate>();

  /** @throws UserError where a pointer is none */
  constructor({ slot, value, time, sequence }: Wanted) {
    const pointer = (text: string | null): Pointer | null => (text === null ? null : parsePointer(text));
    this.slot = slot;
    this.value = pointer(value);
    this.time = pointer(time);
    this.sequence = pointer(sequence);
    this.needsJson = value !== null || time !== null || sequence !== null;
  }

  /** From a payload that is a number. @param out its element 0 takes the value, element 1 NaN: it has no time of its own */
  plain(payload: Uint8Array, out: Float64Array): Fault | null {
    out[1] = NaN;
    return readNumber(payload, 0, payload.length, out) ? null : 'not-a-number';
  }

  /**
   * From a parsed JSON payload.
   * @param out element 0 takes the value, element 1 the reading's own time in ms, or NaN where the channel wants none
   */
  json(document: unknown, out: Float64Array): Fault | null {
    out[1] = NaN;
    const found = this.value === null ? document : follow(document, this.value);
    if (found === undefined) return 'missing-field';
    if (!readJsonNumber(found, out)) return 'not-a-number';
    if (this.time === null) return null;
    const at = follow(document, this.time);
    if (at === undefined) return 'missing-field';
    out[1] = readJsonTime(at);
    return Number.isNaN(out[1]) ? 'bad-time' : null;
  }

  /**
   * Whether a message is news by its sequence number. To be asked last, and not of retained messages: it takes note.
   * @param again whether the broker says that it sent it before
   */
  repeats(document: unknown, topic: string, again: boolean): Fault | null {
    if (this.sequence === null) return null;
    const number = follow(document, this.sequence);
    if (number === undefined) return 'missing-field';
    if (typeof number !== 'number' || !Number.isSafeInteger(number)) return 'not-a-number';
    return this.gate(topic).take(number, again) ? null : 'repeated';
  }

  /** Each topic counts for itself. At the bound all are forgotten, so that a repeat may pass. */
  private gate(topic: string): SequenceGate {
    let gate = this.gates.get(topic);
    if (!gate) {
      if (this.gates.size >= MOST_GATES) this.gates.clear();
      this.gates.set(topic, (gate = new SequenceGate()));
    }
    return gate;
  }
}
