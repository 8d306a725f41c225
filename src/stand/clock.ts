const STEP = 1000; // ms beyond which a difference is a step and not drift
const SLEW_OVER = 60_000; // a difference is worked off over about this many ms ...
const SLEW_MOST = 0.001; // ... but never faster than this share

/**
 * The stand's clock: wall time carried forward by the monotonic clock, so that setting the system clock neither invents
 * a silence nor hides one. Slow differences (slewing, crystal drift) are followed; a step is not, and is reported.
 */
export class Clock {
  private wall: number;
  private mono: number;
  private rate = 1;
  private stepped = 0;

  /**
   * @param onStep told when the system clock was set by more than a second, with the step in ms (positive: forward)
   * @param date wall time, ms since the epoch
   * @param monotonic a clock that never steps, ms
   */
  constructor(
    private readonly onStep: (step: number) => void = () => undefined,
    private readonly date: () => number = () => Date.now(),
    private readonly monotonic: () => number = () => performance.now(),
  ) {
    this.wall = date();
    this.mono = monotonic();
  }

  /** Time of the stand, ms since the epoch. Never goes back. */
  now(): number {
    return this.wall + (this.monotonic() - this.mono) * this.rate;
  }

  /** To be called every few seconds: compares with the system clock, follows its drift and reports its steps. */
  follow(): void {
    const now = this.now();
    let apart = this.date() - now - this.stepped;
    if (Math.abs(apart) > STEP) {
      this.stepped += apart;
      this.onStep(apart);
      apart = 0;
    }
    this.wall = now;
    this.mono = this.monotonic();
    this.rate = 1 + Math.max(-SLEW_MOST, Math.min(SLEW_MOST, apart / SLEW_OVER));
  }
}
