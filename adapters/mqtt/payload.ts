import { isUtf8 } from 'node:buffer';
import { readJsonNumber, readNumber } from '../decoding/number.js';
import { follow, parsePointer, type Pointer } from '../decoding/pointer.js';
import { parseTime } from '../decoding/time.js';
import type { Fault, Wanted } from '../source.js';
import { SequenceGate } from './sequenceGate.js';

/** One channel's way into a payload, compiled. */
export class Tap {
  private readonly value: Pointer | null;
  private readonly time: Pointer | null;
  private readonly sequence: Pointer | null;
  private readonly gates = new Map<string, SequenceGate>();

  constructor(readonly wanted: Wanted) {
    const { value, time, sequence } = wanted;
    this.value = value === null ? null : parsePointer(value);
    this.time = time === null ? null : parsePointer(time);
    this.sequence = sequence === null ? null : parsePointer(sequence);
  }

  get needsJson(): boolean {
    return this.value !== null || this.time !== null || this.sequence !== null;
  }

  /** From a payload that is a number. @param out its element 0 takes the value */
  plain(payload: Buffer, out: Float64Array): Fault | null {
    return readNumber(payload, 0, payload.length, out) ? null : 'not-a-number';
  }

  /**
   * From a parsed JSON payload.
   * @param out element 0 takes the value, element 1 the reading's own time in ms, or NaN where it has none
   */
  json(document: unknown, topic: string, out: Float64Array): Fault | null {
    out[1] = NaN;
    const found = this.value === null ? document : follow(document, this.value);
    if (found === undefined) return 'missing-field';
    if (!readJsonNumber(found, out)) return 'not-a-number';
    if (this.time !== null) {
      const at = follow(document, this.time);
      if (at === undefined) return 'missing-field';
      out[1] = typeof at === 'number' || typeof at === 'string' ? parseTime(at) : NaN;
      if (Number.isNaN(out[1])) return 'bad-time';
    }
    if (this.sequence === null) return null;
    const number = follow(document, this.sequence);
    if (typeof number !== 'number' || !Number.isSafeInteger(number)) return number === undefined ? 'missing-field' : 'not-a-number';
    return this.gate(topic).take(number) ? null : 'repeated';
  }

  /** Each topic counts for itself; the number of topics remembered is bounded. */
  private gate(topic: string): SequenceGate {
    let gate = this.gates.get(topic);
    if (!gate) {
      if (this.gates.size >= 1000) this.gates.clear();
      gate = new SequenceGate();
      this.gates.set(topic, gate);
    }
    return gate;
  }
}

/** Whether bytes from outside are text: UTF-8 without NUL. */
export const isText = (bytes: Buffer): boolean => isUtf8(bytes) && !bytes.includes(0);
