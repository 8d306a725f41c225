const REACH = 8192; // how far behind the newest number a reading may come and still be told from one seen already
const AHEAD = 8; // a counter that stands at least here and is followed by 0 or 1 has begun anew

/**
 * Lets each sequence number through once. After a fault publishers and brokers repeat and reorder QoS 1 messages; run rules take
 * each reading once. A late number that was not seen is let through. The sender has begun to count anew when a number
 * lies 8192 or more behind the newest, or is 0 or 1 after a newest of at least 8, so that counters of any width from four bits may
 * wrap. Where the first readings of a restarted sender are lost, those after them are dropped as repeated until its
 * counter passes the newest number seen. One kilobyte.
 */
export class SequenceGate {
  private newest = NaN;
  private readonly bits = new Uint32Array(REACH / 32);

  /**
   * @param number a safe integer
   * @param again whether the broker says that it has sent this before: such a one is no new beginning
   * @returns whether it is new
   */
  take(number: number, again = false): boolean {
    const behind = this.newest - number; // NaN before the first
    const anew = behind >= REACH || (!again && (number === 0 || number === 1) && this.newest >= AHEAD && behind > 0);
    if (anew || !(behind > -REACH)) this.bits.fill(0);
    else for (let between = this.newest + 1; between < number; between++) this.set(between, false);
    if (anew || !(behind >= 0)) {
      this.newest = number;
      this.set(number, true);
      return true;
    }
    if (this.has(number)) return false;
    this.set(number, true);
    return true;
  }

  private has(number: number): boolean {
    const place = mod(number);
    return (this.bits[place >> 5]! & (1 << (place & 31))) !== 0;
  }

  private set(number: number, on: boolean): void {
    const place = mod(number);
    if (on) this.bits[place >> 5]! |= 1 << (place & 31);
    else this.bits[place >> 5]! &= ~(1 << (place & 31));
  }
}

const mod = (number: number): number => ((number % REACH) + REACH) % REACH;
