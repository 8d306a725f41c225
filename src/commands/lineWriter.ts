import { once } from 'node:events';

const BATCH = 1 << 16; // characters gathered before they are written

/** Many lines to standard output, in large writes, no faster than its reader takes them. */
export class LineWriter {
  private text = '';
  private full = false;

  line(text: string): void {
    this.text += text + '\n';
    if (this.text.length >= BATCH) this.flush();
  }

  flush(): void {
    if (this.text === '') return;
    this.full = !process.stdout.write(this.text);
    this.text = '';
  }

  /** A promise to await before more is written, or null. */
  drained(): Promise<void> | null {
    if (!this.full) return null;
    this.full = false;
    return once(process.stdout, 'drain').then(() => undefined);
  }
}
