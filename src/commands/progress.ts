import { SingleBar } from 'cli-progress';

const PATIENCE = 500; // ms before a bar is worth showing

/** A progress bar on standard error: only on a terminal, and only when the work lasts. */
export class Progress {
  private bar: SingleBar | null = null;
  private readonly began = performance.now();

  constructor(private readonly label: string) {}

  update(fraction: number): void {
    if (!process.stderr.isTTY) return;
    if (!this.bar) {
      if (performance.now() - this.began < PATIENCE) return;
      this.bar = new SingleBar({
        format: `${this.label} [{bar}] {percentage} %, {eta_formatted} to go`,
        barsize: 30,
        barCompleteChar: '=',
        barIncompleteChar: '.',
        stream: process.stderr,
        hideCursor: false,
        clearOnComplete: true,
      });
      this.bar.start(1, 0);
    }
    this.bar.update(fraction);
  }

  stop(): void {
    this.bar?.stop();
  }
}
