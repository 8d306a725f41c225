import { fingerprint } from './fingerprint.js';

const IDENTIFIERS = 65_536;
const RECENT = 8192; // messages for which an identifier is remembered: more than any broker is likely to have under way

/**
 * Tells a QoS 1 message that the broker sends again after a lost connection from a new one, so that the engine takes each
 * reading once. A broker repeats what was not acknowledged under its first packet identifier and with the DUP flag (MQTT 3.1.1
 * and 5, 4.4). The same content must have been seen under this identifier lately: brokers use identifiers again.
 */
export class Redelivery {
  private readonly prints = new Uint32Array(IDENTIFIERS);
  private readonly turns = new Float64Array(IDENTIFIERS).fill(-Infinity);
  private turn = 0;

  /** A session has begun anew: nothing of the one before will be repeated. */
  forget(): void {
    this.turns.fill(-Infinity);
  }

  /** Takes note of a message. @returns whether it was delivered before */
  seen(messageId: number, dup: boolean, topic: string, payload: Uint8Array): boolean {
    const place = messageId & (IDENTIFIERS - 1);
    const print = fingerprint(topic, payload);
    const again = dup && this.prints[place] === print && this.turn - this.turns[place]! <= RECENT;
    this.prints[place] = print;
    this.turns[place] = ++this.turn;
    return again;
  }
}
