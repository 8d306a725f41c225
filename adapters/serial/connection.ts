import type { ChildProcess } from 'node:child_process';
import { SerialPort } from 'serialport';
import { clean } from '../../src/text/clean.js';
import type { SerialOptions } from '../options.js';
import { hangUpBinding } from './binding.js';
import { markParityErrors } from './parityMarks.js';

const CLOSE_WITHIN = 800; // ms
const PROBE_EVERY = 5000; // ms without a byte until the driver is asked whether the line is still there
const CHUNK = 65_536; // bytes read at most at once

/** What becomes of a connection. After `refused` or `lost`, or once it is being closed, nothing more is heard of it. */
export interface ConnectionEvents {
  opened(): void;
  refused(error: Error): void;
  data(chunk: Buffer): void;
  /** @param what the rest of a sentence that begins with the port's name */
  lost(what: string): void;
  /** Bytes with parity errors will be dropped silently. */
  unmarked(): void;
}

/**
 * One opening of a serial port, from the attempt until it is gone; never opened twice, since a port object whose stream
 * has failed would open again but never read.
 */
export class Connection {
  private readonly port: SerialPort;
  private over = false;
  private heard = true;
  private probe: NodeJS.Timeout | null = null;
  private stty: ChildProcess | null = null;
  /** Takes the port, if it did open, whose opening was under way at the close. */
  private abandoned: ((port: SerialPort | null) => void) | null = null;

  /** @throws Error where serialport does not know the settings */
  constructor(
    private readonly options: SerialOptions,
    private readonly events: ConnectionEvents,
  ) {
    const { path, baudRate, dataBits, parity, stopBits } = options;
    const more = { hupcl: false, autoOpen: false, highWaterMark: CHUNK, ...({ binding: hangUpBinding } as object) };
    this.port = new SerialPort({ path, baudRate, dataBits, parity, stopBits, ...more });
    this.port.on('error', () => undefined); // closing with work in hand emits one, which must not end the process
    this.port.on('data', (chunk: Buffer) => {
      this.heard = true;
      if (!this.over) events.data(chunk);
    });
    this.port.once('close', () => this.lose('was unplugged or hung up'));
    this.port.open((error) => this.opened(error));
  }

  /** Resolves when the port is free again, or after 0.8 s. */
  async close(): Promise<void> {
    this.release();
    let timer: NodeJS.Timeout | undefined;
    const late = new Promise<void>((resolve) => (timer = setTimeout(resolve, CLOSE_WITHIN)));
    await Promise.race([this.shut(), late]);
    clearTimeout(timer);
  }

  private opened(error: Error | null): void {
    if (this.over) {
      this.abandoned?.(error ? null : this.port);
    } else if (error) {
      this.release();
      this.events.refused(error);
    } else {
      this.probe = setInterval(() => this.ask(), PROBE_EVERY);
      this.events.opened();
      this.stty = markParityErrors(this.options.path, (marked) => {
        if (!marked && !this.over) this.events.unmarked();
      });
    }
  }

  /** A line can die without any event: a silent one is asked for its modem lines, which fails on a dead one. */
  private ask(): void {
    if (this.heard) this.heard = false;
    else
      this.port.get((error) => {
        if (error && isDead(error)) this.lose(`no longer answers (${clean(error.message, 80)})`);
      });
  }

  private lose(what: string): void {
    if (this.over) return;
    this.release();
    if (this.port.isOpen) this.port.close(() => undefined);
    this.events.lost(what);
  }

  private release(): void {
    this.over = true;
    if (this.probe) clearInterval(this.probe);
    this.stty?.kill();
  }

  private async shut(): Promise<void> {
    const opening = this.port.opening && new Promise<SerialPort | null>((resolve) => (this.abandoned = resolve));
    const open = opening ? await opening : this.port.isOpen ? this.port : null;
    if (open) await new Promise<void>((resolve) => open.close(() => resolve()));
  }
}

/** A pseudo-terminal has no modem lines, and some adapters none either: only these errors mean that the line is gone. */
function isDead(error: Error): boolean {
  return /input\/output|no such device|bad file/i.test(error.message);
}
