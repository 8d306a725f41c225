import { createReadStream } from 'node:fs';
import { open } from 'node:fs/promises';
import { createGunzip } from 'node:zlib';
import { clean } from '../../src/text/clean.js';
import { UserError } from '../../src/text/errors.js';

const CHUNK = 1 << 20;
const PACKED = 1 << 14;

/** A recording's bytes in chunks, unpacked where they are gzip, and how far the file has been read. */
export interface RecordingBytes {
  readonly chunks: AsyncIterable<Buffer>;
  /** Share of the file that was read, 0 to 1. */
  fraction(): number;
  /** A gzip file that stops in the middle: what was whole has been given, and this says so; else null. */
  torn(): string | null;
}

/**
 * Opens a recording. Whether it is gzip is told by its first bytes, not by its name.
 * @throws UserError where there is no such file, it may not be read, or it is no text
 */
export async function recordingBytes(path: string): Promise<RecordingBytes> {
  const name = clean(path, 200);
  const { size, head } = await peek(path, name);
  if (size === 0) throw new UserError(`The recording ${name} is empty.`);
  if ((head[0] === 0xff && head[1] === 0xfe) || (head[0] === 0xfe && head[1] === 0xff))
    throw new UserError(`The recording ${name} is written in UTF-16.`, 'Save it as UTF-8.');
  const file = createReadStream(path, { highWaterMark: CHUNK });
  const gzip = head[0] === 0x1f && head[1] === 0x8b;
  let read = 0;
  let torn: string | null = null;
  file.on('data', (chunk) => (read += chunk.length));
  async function* chunks(): AsyncGenerator<Buffer> {
    try {
      if (!gzip) for await (const chunk of file) yield chunk as Buffer;
      else {
        const failure = yield* unpacked(file);
        if (failure?.code === 'Z_BUF_ERROR') torn = `${name} stops in the middle: what was whole has been read.`;
        else if (failure) torn = `${name} is damaged from some place on (${clean(failure.message, 60)}): what came before has been read.`;
      }
    } finally {
      file.destroy();
    }
  }
  return { chunks: chunks(), fraction: () => Math.min(1, read / size), torn: () => torn };
}

/**
 * Everything that a gzip file holds, up to where it is damaged. The packed bytes are handed over in small pieces, since
 * each may become a thousand times as much.
 * @returns what was wrong, or null
 */
async function* unpacked(file: AsyncIterable<Buffer>): AsyncGenerator<Buffer, NodeJS.ErrnoException | null> {
  const gunzip = createGunzip({ chunkSize: CHUNK });
  const ready: Buffer[] = [];
  let failure: NodeJS.ErrnoException | null = null;
  gunzip.on('data', (chunk: Buffer) => ready.push(chunk));
  gunzip.on('error', (error) => (failure = error));
  const over = new Promise<void>((resolve) => gunzip.once('end', resolve).once('close', resolve));
  try {
    for await (const chunk of file)
      for (let at = 0; at < chunk.length && gunzip.writable && gunzip.readable; at += PACKED) {
        await Promise.race([new Promise<void>((resolve) => gunzip.write(chunk.subarray(at, at + PACKED), () => resolve())), over]);
        yield* ready.splice(0);
      }
    gunzip.end();
    await over;
    yield* ready;
    return failure;
  } finally {
    gunzip.destroy();
  }
}

async function peek(path: string, name: string): Promise<{ size: number; head: Buffer }> {
  try {
    const file = await open(path, 'r');
    try {
      const { size } = await file.stat();
      const head = Buffer.alloc(2);
      await file.read(head, 0, 2, 0);
      return { size, head };
    } finally {
      await file.close();
    }
  } catch (error) {
    const { code } = error as NodeJS.ErrnoException;
    if (code === 'ENOENT') throw new UserError(`There is no recording ${name}.`, 'Look at its path.');
    if (code === 'EISDIR') throw new UserError(`${name} is a folder.`, 'Name a recording in it.');
    if (code === 'EACCES') throw new UserError(`The recording ${name} may not be read by this user.`, 'Give it read permission (chmod).');
    throw new UserError(`The recording ${name} cannot be read (${code ?? 'unknown reason'}).`);
  }
}
