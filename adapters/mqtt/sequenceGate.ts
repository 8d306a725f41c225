const REACH = 1024; // how far behind the newest number a reading may come and still be told from one seen already

/**
 * Lets each sequence number through once. At QoS 1 a broker repeats and reorders messages after a fault; run rules take
 * each reading once. A late number that was not seen is let through; one more than 1024 behind the newest means that the
 * sender has begun to count anew.
 */
export class SequenceGate {
  private newest = -1;
  private readonly seen = new Int8Array(REACH);

  /** @param number a safe integer. @returns whether it is new */
  take(number: number): boolean {
    const place = ((number % REACH) + REACH) % REACH;
    if (this.newest === -1 || number > this.newest || number <= this.newest - REACH) {
      const restarted = this.newest === -1 || number <= this.newest - REACH || number >= this.newest + REACH;
      if (restarted) this.seen.fill(0);
      else for (let between = this.newest + 1; between < number; between++) this.seen[((between % REACH) + REACH) % REACH] = 0;
      this.newest = number;
      this.seen[place] = 1;
      return true;
    }
    if (this.seen[place] === 1) return false;
    this.seen[place] = 1;
    return true;
  }
}
