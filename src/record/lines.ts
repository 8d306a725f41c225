import { open } from 'node:fs/promises';
import { LONGEST_LINE } from './chain.js';

/** One line of a file, as bytes, without its LF. */
export interface Line {
  /** Counted from 1. */
  readonly number: number;
  readonly bytes: Buffer;
  /** whole; torn: the file ends before an LF; long: beyond `longest`, and `bytes` holds its beginning only. */
  readonly kind: 'whole' | 'torn' | 'long';
}

const CHUNK = 1 << 16;
const LF = 10;

/**
 * The lines of a file, read in pieces: memory stays bounded whatever the file holds.
 * @param longest bytes of a line that are kept
 */
export async function* lines(file: string, longest = LONGEST_LINE): AsyncGenerator<Line, void, undefined> {
  const handle = await open(file, 'r');
  try {
    const chunk = Buffer.allocUnsafe(CHUNK);
    let parts: Buffer[] = [];
    let kept = 0;
    let length = 0;
    let number = 1;
    const take = (piece: Buffer) => {
      length += piece.length;
      const part = Buffer.from(piece.subarray(0, longest - kept)); // a copy: the chunk is read into again
      if (part.length > 0) parts.push(part);
      kept += part.length;
    };
    const line = (hasEnd: boolean): Line => {
      const bytes = parts.length === 1 ? parts[0]! : Buffer.concat(parts);
      const kind = length > longest ? 'long' : hasEnd ? 'whole' : 'torn';
      parts = [];
      kept = length = 0;
      return { number: number++, bytes, kind };
    };
    for (;;) {
      const { bytesRead } = await handle.read(chunk, 0, CHUNK, null);
      if (bytesRead === 0) break;
      const read = chunk.subarray(0, bytesRead);
      let from = 0;
      for (let to = read.indexOf(LF); to >= 0; to = read.indexOf(LF, from)) {
        take(read.subarray(from, to));
        yield line(true);
        from = to + 1;
      }
      take(read.subarray(from));
    }
    if (length > 0) yield line(false);
  } finally {
    await handle.close();
  }
}
