import { seal, type Sealed } from './chain.js';

/** A record that waits for the disk. */
export interface Waiting {
  readonly record: Sealed;
  readonly onDurable: () => void;
}

const NOTHING = () => undefined;

/**
 * Records not yet on disk, in order, bounded by bytes. At the bound the oldest are kept and new ones are dropped;
 * the dropped are counted, and the count itself becomes a record as soon as there is room.
 */
export class Backlog {
  private waiting: Waiting[] = [];
  private first = 0;
  private bytes = 0;
  private lostCount = 0;
  private lostFrom = 0;
  private lostTo = 0;
  /** Records ever taken in (a record of losses included). */
  taken = 0;

  constructor(
    private readonly maxBytes: number,
    private readonly now: () => number,
  ) {}

  get length(): number {
    return this.waiting.length - this.first;
  }

  /** Records dropped whose loss is not yet a record. */
  get lost(): number {
    return this.lostCount;
  }

  /** @returns whether the record was kept */
  add(record: Sealed, onDurable: () => void): boolean {
    this.tellLosses();
    if (this.lostCount > 0 || this.bytes + record.bytes > this.maxBytes) {
      this.lostTo = this.now();
      if (this.lostCount === 0) this.lostFrom = this.lostTo;
      this.lostCount++;
      this.tellLosses();
      return false;
    }
    this.push({ record, onDurable });
    return true;
  }

  /** The oldest records whose lines fit into `limit` bytes, but `least` of them in any case. They stay until `remove`. */
  peek(limit: number, least: number): readonly Waiting[] {
    let end = this.first;
    for (let sum = 0; end < this.waiting.length; end++) {
      sum += this.waiting[end]!.record.bytes;
      if (sum > limit && end - this.first >= least) break;
    }
    return this.waiting.slice(this.first, end);
  }

  /** Forgets the oldest `count`, which are durable now. */
  remove(count: number): void {
    for (let i = 0; i < count; i++) this.bytes -= this.waiting[this.first + i]!.record.bytes;
    this.first += count;
    if (this.first > 1024 && this.first * 2 > this.waiting.length) {
      this.waiting = this.waiting.slice(this.first);
      this.first = 0;
    }
    this.tellLosses();
  }

  private tellLosses(): void {
    if (this.lostCount === 0 || this.bytes > this.maxBytes / 2) return; // half must be free: one record for one time of need
    const record = seal({
      event: 'lost',
      time: new Date(this.now()).toISOString(),
      count: this.lostCount,
      from: new Date(this.lostFrom).toISOString(),
      to: new Date(this.lostTo).toISOString(),
    });
    this.lostCount = 0;
    this.push({ record, onDurable: NOTHING });
  }

  private push(waiting: Waiting): void {
    this.waiting.push(waiting);
    this.bytes += waiting.record.bytes;
    this.taken++;
  }
}
