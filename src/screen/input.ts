import { Readable } from 'node:stream';
import { StringDecoder } from 'node:string_decoder';

type Terminal = NodeJS.ReadableStream & { isRaw?: boolean; setRawMode?(on: boolean): unknown };

 
const CSI = /^\x1b\[[0-9;:<=>?]*[ -/]*[@-~]/;
const STRING = /^\x1b[\]P_^X][\s\S]*?(?:\x07|\x1b\\)/;
// control sequences that are keys or mouse reports; the others are replies of the terminal and belong to nobody
const KEY = /^\x1b\[(?:(?:\d+(?:;\d+)*)?[A-HPQRSZ]|\d+(?:;\d+)*[~^$]|<\d+;\d+;\d+[Mm]|\d+;\d+;\d+M)$/;
 
const PASTE_BEGINS = '\x1b[200~';
const PASTE_ENDS = '\x1b[201~';
const ESCAPE_WITHIN = 40; // ms that the rest of a key may take on a slow line
const LONGEST = 1 << 16;

/**
 * Hands whole keys and whole mouse reports to blessed, one at a time. By itself blessed reads each chunk alone: an arrow
 * key that comes in two pieces would be Escape and letters, a reply of the terminal or pasted text would be keys.
 */
export class TokenInput extends Readable {
  readonly isTTY = true;
  isRaw = false;
  private buffer = '';
  private pasting = false;
  private timer: NodeJS.Timeout | null = null;
  private readonly decoder = new StringDecoder('utf8');

  constructor(private readonly source: Terminal) {
    super({ read: () => undefined });
    source.on('error', () => undefined); // the keyboard has gone; what is written tells of the terminal
    source.on('data', (data: Buffer | string) => {
      this.buffer += typeof data === 'string' ? data : this.decoder.write(data);
      if (this.buffer.length > LONGEST) this.buffer = '';
      this.drain(false);
    });
  }

  setRawMode(on: boolean): this {
    this.source.setRawMode?.(on);
    this.isRaw = on;
    return this;
  }

  override pause(): this {
    this.source.pause();
    return super.pause();
  }

  override resume(): this {
    this.source.resume();
    return super.resume();
  }

  private drain(late: boolean): void {
    if (this.timer) clearTimeout(this.timer);
    this.timer = null;
    while (this.buffer.length > 0) {
      const token = this.pasting ? this.paste() : this.next();
      if (token === null) break;
      this.buffer = this.buffer.slice(token.length);
      if (token.emit) this.push(Buffer.from(token.emit));
    }
    if (this.buffer.length === 0) return;
    if (late) {
      if (this.buffer === '\x1b') this.push(Buffer.from('\x1b'));
      this.buffer = '';
      this.pasting = false;
    } else this.timer = setTimeout(() => this.drain(true), this.pasting ? 2000 : ESCAPE_WITHIN);
  }

  /** Pasted text is no keys: it is dropped. */
  private paste(): { length: number; emit: string | null } | null {
    const end = this.buffer.indexOf(PASTE_ENDS);
    if (end < 0) {
      this.buffer = this.buffer.slice(-PASTE_ENDS.length);
      return null;
    }
    this.pasting = false;
    return { length: end + PASTE_ENDS.length, emit: null };
  }

  /** The next whole key, report or run of text; null where its end has not come yet. */
  private next(): { length: number; emit: string | null } | null {
    const { buffer } = this;
    if (!buffer.startsWith('\x1b')) {
      const character = String.fromCodePoint(buffer.codePointAt(0)!);
      return { length: character.length, emit: character };
    }
    if (buffer.startsWith(PASTE_BEGINS)) {
      this.pasting = true;
      return { length: PASTE_BEGINS.length, emit: null };
    }
    const kind = buffer[1];
    if (kind === undefined) return null;
    if (kind === '[') {
      const sequence = CSI.exec(buffer)?.[0];
      if (sequence === undefined) return buffer.length > 64 ? { length: 2, emit: null } : null;
      return { length: sequence.length, emit: KEY.test(sequence) ? sequence : null };
    }
    if (kind === 'O') return buffer.length < 3 ? null : { length: 3, emit: buffer.slice(0, 3) };
    if (']P_^X'.includes(kind)) {
      const sequence = STRING.exec(buffer)?.[0];
      return sequence === undefined ? null : { length: sequence.length, emit: null };
    }
    if (kind === '\x1b') return { length: 1, emit: '\x1b' };
    return { length: 2, emit: buffer.slice(0, 2) };
  }
}
