import { spawn, type ChildProcess } from 'node:child_process';
import { constants, existsSync, mkdtempSync, rmSync } from 'node:fs';
import { open, type FileHandle } from 'node:fs/promises';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { until } from '../adapters/recordingSink.js';

/**
 * A virtual serial line: two pseudo-terminals that socat joins. `path` is the end a program opens, the other is
 * written by the test as an instrument would. `vanish` ends socat, so that both ends hang up as an unplugged adapter
 * does; `appear` makes the line anew under the same name.
 */
export class PtyPair {
  readonly path: string;
  private readonly folder = mkdtempSync(join(tmpdir(), 'kilter-pty-'));
  private readonly far: string;
  private socat: ChildProcess | null = null;
  private end: FileHandle | null = null;

  constructor() {
    this.path = join(this.folder, 'instrument');
    this.far = join(this.folder, 'far');
  }

  async appear(): Promise<void> {
    const address = (link: string): string => `pty,raw,echo=0,link=${link}`;
    this.socat = spawn('socat', [address(this.path), address(this.far)], { stdio: 'ignore' });
    await until(() => existsSync(this.path) && existsSync(this.far), 'socat has made its pseudo-terminals');
    this.end = await open(this.far, constants.O_RDWR | constants.O_NOCTTY);
  }

  /** Writes as the instrument. Rejects when the line has vanished. */
  async send(data: string | Buffer): Promise<void> {
    if (!this.end) throw new Error('The line is not there.');
    const bytes = typeof data === 'string' ? Buffer.from(data) : data;
    for (let at = 0; at < bytes.length; ) at += (await this.end.write(bytes, at)).bytesWritten;
  }

  async vanish(): Promise<void> {
    const { socat, end } = this;
    this.socat = this.end = null;
    rmSync(this.path, { force: true }); // first: a dangling name may lead to the next terminal of another program
    if (socat) {
      const gone = new Promise((resolve) => socat.once('exit', resolve));
      socat.kill('SIGKILL');
      await gone;
    }
    await end?.close().catch(() => undefined);
    rmSync(this.far, { force: true });
  }

  async dispose(): Promise<void> {
    await this.vanish();
    rmSync(this.folder, { recursive: true, force: true });
  }
}
