/** One task that is tried again after a while: the waits double up to a bound, until `reset`. */
export class Retry {
  private timer: NodeJS.Timeout | null = null;
  private wait: number;

  /** @param first wait in ms; `longest` as many times the first */
  constructor(
    private readonly first: number,
    private readonly longest: number,
  ) {
    this.wait = first;
  }

  get isArmed(): boolean {
    return this.timer !== null;
  }

  /** The timer keeps the process alive: what waits in memory must not end with it unsaid. */
  arm(task: () => void): void {
    this.disarm();
    this.timer = setTimeout(() => {
      this.timer = null;
      task();
    }, this.wait);
    this.wait = Math.min(this.wait * 2, this.first * this.longest);
  }

  disarm(): void {
    if (this.timer) clearTimeout(this.timer);
    this.timer = null;
  }

  reset(): void {
    this.wait = this.first;
  }
}
