const SPAN = 512; // bytes over which is judged, by halving sums: older bytes count ever less
const ENOUGH = 128;
const UNREADABLE_FROM = 0.25;
const READABLE_BELOW = 0.05;

/**
 * Tells whether what a line carries can be read at all. A wrong baud rate, parity or number of data bits turns a text
 * into bytes of which a large part is no text; single disturbances do not. Judged over about the last 500 bytes, with
 * hysteresis: unreadable from a quarter of bad bytes on, readable again below a twentieth.
 */
export class Legibility {
  private total = 0;
  private bad = 0;
  private unreadable = false;

  reset(): void {
    this.total = this.bad = 0;
    this.unreadable = false;
  }

  /** Counts the bytes of a readable line. @returns whether the line has become readable with it */
  good(length: number): boolean {
    return this.add(length, 0) && !this.unreadable;
  }

  /** Counts the bytes of a refused line, one by one. @returns whether an unreadable episode begins with it */
  refused(bytes: Buffer, start: number, end: number): boolean {
    let bad = 0;
    for (let at = start; at < end; at++) {
      const byte = bytes[at]!;
      if (byte >= 0x7f || (byte < 0x20 && byte !== 0x09)) bad++;
    }
    return this.add(end - start, bad) && this.unreadable;
  }

  /** @returns whether the verdict has changed */
  private add(total: number, bad: number): boolean {
    this.total += total;
    this.bad += bad;
    while (this.total > SPAN) {
      this.total /= 2;
      this.bad /= 2;
    }
    const share = this.bad / this.total;
    const verdict = this.unreadable ? share >= READABLE_BELOW : this.total >= ENOUGH && share >= UNREADABLE_FROM;
    if (verdict === this.unreadable) return false;
    this.unreadable = verdict;
    return true;
  }
}
