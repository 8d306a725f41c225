const LF = 0x0a;

/** Longest line of a recording in bytes; a longer one is dropped and counted. */
export const LONGEST_LINE = 1 << 20;

/**
 * Cuts chunks into lines at LF, whatever chunk they came in. A line within one chunk is not copied. A line beyond the bound is
 * dropped and reported once.
 */
export class LineCarry {
  private parts: Buffer[] = [];
  private carried = 0;
  private dropping = false;

  constructor(
    private readonly longest: number,
    private readonly lines: {
      /** Whole lines: bytes from start to before end, every line closed by LF. */
      block(bytes: Buffer, start: number, end: number): void;
      tooLong(bytes: Buffer): void;
    },
  ) {}

  push(bytes: Buffer): void {
    let start = 0;
    if (this.carried > 0 || this.dropping) {
      const at = bytes.indexOf(LF);
      if (at < 0) {
        this.keep(bytes);
        return;
      }
      if (this.dropping) {
        this.dropping = false;
        start = at + 1;
      } else if (this.carried + at > this.longest) {
        this.lines.tooLong(this.parts[0]!);
        this.forget();
        start = at + 1;
      } else {
        const line = Buffer.concat([...this.parts, bytes.subarray(0, at + 1)]);
        this.forget();
        this.lines.block(line, 0, line.length);
        start = at + 1;
      }
    }
    const last = bytes.lastIndexOf(LF);
    if (last >= start) this.lines.block(bytes, start, last + 1);
    if (last + 1 < bytes.length) this.keep(bytes.subarray(Math.max(start, last + 1)));
  }

  /** There are no more bytes. @param torn whether to leave out a last line without an end, since it may lack a part */
  end(torn = false): void {
    if (this.carried > 0 && !torn) {
      const line = Buffer.concat([...this.parts, Buffer.of(LF)]);
      this.forget();
      this.lines.block(line, 0, line.length);
    }
  }

  private keep(bytes: Buffer): void {
    if (this.dropping || bytes.length === 0) return;
    if (this.carried + bytes.length > this.longest) {
      this.lines.tooLong(this.parts[0] ?? bytes);
      this.forget();
      this.dropping = true;
      return;
    }
    this.parts.push(Buffer.from(bytes));
    this.carried += bytes.length;
  }

  private forget(): void {
    this.parts = [];
    this.carried = 0;
  }
}
