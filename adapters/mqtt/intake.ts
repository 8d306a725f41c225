import { isUtf8 } from 'node:buffer';
import { UserError } from '../../src/text/errors.js';
import { clean } from '../../src/text/clean.js';
import type { Fault, Sink, Wanted } from '../source.js';
import { Routes } from './routes.js';
import { Tap } from './tap.js';
import { topicFault } from './topicFault.js';

const SAMPLE = 120; // bytes of a refused payload handed on

/** What is told of a message beside topic and payload. */
export interface Arrival {
  /** A retained message at subscription. One that is published with the retain flag while we listen comes without it. */
  readonly retain: boolean;
  /** The broker sends it again. */
  readonly dup: boolean;
}

/** From messages to readings in a sink: routing and decoding joined. Knows nothing of connections. */
export class Intake {
  private readonly routes: Routes<Tap>;
  private readonly numbers = new Float64Array(2);

  /** @throws UserError where a channel has no topic or a pointer that is none */
  constructor(
    wanted: readonly Wanted[],
    private readonly maxPayload: number,
  ) {
    this.routes = new Routes(wanted.map((channel) => [topicOf(channel), new Tap(channel)] as const));
  }

  /** What to subscribe to. */
  get filters(): readonly string[] {
    return this.routes.filters;
  }

  take(topic: string, payload: Buffer, { retain, dup }: Arrival, sink: Sink): void {
    const taps = this.routes.to(topic);
    if (taps === null) sink.fault('bad-bytes', topic);
    else if (taps.length > 0 && payload.length > this.maxPayload) sink.fault('too-long', sample(payload));
    else this.readAll(taps, topic, payload, { retain, dup }, sink);
  }

  private readAll(taps: readonly Tap[], topic: string, payload: Buffer, { retain, dup }: Arrival, sink: Sink): void {
    let document: unknown;
    let parsed = false;
    for (const tap of taps) {
      if (tap.needsJson && !parsed) {
        document = parse(payload);
        parsed = true;
      }
      let fault = this.read(tap, document, payload);
      if (fault === null && !retain) fault = tap.repeats(document, topic, dup);
      if (fault === null) this.deliver(tap.slot, retain, topic, sink);
      else sink.fault(fault, sample(payload));
    }
  }

  private read(tap: Tap, document: unknown, payload: Buffer): Fault | null {
    if (tap.needsJson) return document === NO_JSON ? refusal(payload, 'bad-json') : tap.json(document, this.numbers);
    return tap.plain(payload, this.numbers) === null ? null : refusal(payload, 'not-a-number');
  }

  private deliver(slot: number, retain: boolean, topic: string, sink: Sink): void {
    const value = this.numbers[0]!;
    const own = this.numbers[1]!;
    const time = Number.isNaN(own) ? sink.now() : own;
    if (retain) {
      sink.stale(slot, time, value);
      sink.fault('stale', topic);
    } else sink.reading(slot, time, value);
  }
}

const NO_JSON = Symbol('no JSON');

function parse(payload: Buffer): unknown {
  if (!isUtf8(payload)) return NO_JSON; // decoding would put U+FFFD in the place of what is none
  try {
    return JSON.parse(payload.toString('utf8'));
  } catch {
    return NO_JSON;
  }
}

/** What a payload that could not be read is called: text that is wrong, or no text at all. */
const refusal = (payload: Buffer, fault: Fault): Fault => (payload.includes(0) || !isUtf8(payload) ? 'bad-bytes' : fault);

const sample = (payload: Buffer): string => payload.toString('utf8', 0, SAMPLE);

function topicOf({ channel, topic }: Wanted): string {
  const name = clean(channel, 60);
  if (topic === null || topic === '') throw new UserError(`The channel ${name} names no topic.`, "Write 'topic: cell3/bearing/temperature'.");
  const wrong = topicFault(topic);
  if (wrong) throw new UserError(`The topic of ${name} ${wrong}.`, "Give a topic or a filter: '+' stands for one level, '#' for all that follow.");
  return topic;
}
