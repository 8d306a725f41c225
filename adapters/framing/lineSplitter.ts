import { isAscii, isUtf8 } from 'node:buffer';

/** What a splitter finds. The bytes are valid during the call only. */
export interface Lines {
  /** A line without its end: at least one byte, valid UTF-8, no NUL. */
  line(bytes: Buffer, start: number, end: number): void;
  /** A line that was refused; of one that is too long, its first `maxLine` bytes. */
  refused(fault: 'too-long' | 'bad-bytes', bytes: Buffer, start: number, end: number): void;
}

const LF = 0x0a;
const CR = 0x0d;

/**
 * Splits a stream of bytes into lines in linear time and bounded memory. A line ends with LF, CR or both; empty lines
 * are no lines. A line longer than `maxLine` bytes is refused once as soon as it is, and skipped to its end, so that a
 * sender without line ends takes no memory. A line with invalid UTF-8 or a NUL (which is how Linux hands on a byte with
 * a parity or framing error) is refused. Copies only lines that span chunks.
 */
export class LineSplitter {
  private readonly carry: Buffer;
  private carried = 0;
  private carriedPlain = true;
  private skipping = false;
  private partial = false;

  /** @param maxLine greatest length of a line in bytes, without its end */
  constructor(
    private readonly maxLine: number,
    private readonly lines: Lines,
  ) {
    this.carry = Buffer.allocUnsafe(maxLine);
  }

  /**
   * Forgets what was carried, for a new connection.
   * @param dropFirst whether the stream may begin in the middle of a line: everything to the first line end is dropped
   */
  reset(dropFirst: boolean): void {
    this.carried = 0;
    this.carriedPlain = true;
    this.skipping = false;
    this.partial = dropFirst;
  }

  /** Takes the next chunk of the stream. */
  push(chunk: Buffer): void {
    const plain = isAscii(chunk) && !chunk.includes(0);
    const length = chunk.length;
    let start = 0;
    for (let at = 0; at < length; at++) {
      const byte = chunk[at]!;
      if (byte !== LF && byte !== CR) continue;
      this.close(chunk, start, at, plain);
      start = at + 1;
    }
    if (start < length) this.keep(chunk, start, length, plain);
  }

  /** The stream has ended: a last line without an end counts as a line. */
  end(): void {
    this.close(this.carry, 0, 0, true);
    this.reset(this.partial);
  }

  private close(chunk: Buffer, start: number, end: number, plain: boolean): void {
    if (this.carried > 0 || this.skipping) {
      this.keep(chunk, start, end, plain);
      if (!this.skipping && !this.partial) this.judge(this.carry, 0, this.carried, this.carriedPlain);
      this.carried = 0;
      this.carriedPlain = true;
    } else if (end - start > this.maxLine) {
      this.lines.refused('too-long', chunk, start, start + this.maxLine);
    } else if (end > start && !this.partial) {
      this.judge(chunk, start, end, plain);
    }
    this.skipping = false;
    this.partial = false;
  }

  private keep(chunk: Buffer, start: number, end: number, plain: boolean): void {
    if (this.skipping || start === end) return;
    const room = this.maxLine - this.carried;
    const fits = Math.min(room, end - start);
    chunk.copy(this.carry, this.carried, start, start + fits);
    this.carried += fits;
    this.carriedPlain &&= plain;
    if (fits === end - start) return;
    this.lines.refused('too-long', this.carry, 0, this.carried);
    this.skipping = true;
    this.carried = 0;
  }

  private judge(bytes: Buffer, start: number, end: number, plain: boolean): void {
    if (plain || isText(bytes.subarray(start, end))) this.lines.line(bytes, start, end);
    else this.lines.refused('bad-bytes', bytes, start, end);
  }
}

function isText(bytes: Buffer): boolean {
  return isUtf8(bytes) && !bytes.includes(0);
}
