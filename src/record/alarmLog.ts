import { Backlog, type Waiting } from './backlog.js';
import { Ballast, BALLAST } from './ballast.js';
import { join, ORIGIN, seal, type Sealed } from './chain.js';
import { realDisk, type Disk } from './disk.js';
import { takeLock, type Lock } from './lock.js';
import { LogFile, Vanished } from './logFile.js';
import { makeFoldersAbove, placeOf } from './place.js';
import { asUserError, describe, isFull, isTooLarge } from './trouble.js';

export interface AlarmLogOptions {
  /** Size in bytes beyond which the file is rotated; only a single line that is longer makes a larger file. */
  readonly maxBytes: number;
  /** Told once, in a sentence with what to do, when records cannot reach the disk; null when they do again. */
  readonly onTrouble: (sentence: string | null) => void;
  /** Told what was found or happened and needs no action at once. */
  readonly onNote: (sentence: string) => void;
  /** The first record of this process: `{event: 'opened', time, version, stand, ...}`. `tornBytes` and `from` are added where they apply. */
  readonly opening?: object;
  /** Bytes of records kept in memory while the disk fails; default 64 MiB. New ones beyond are dropped, counted, and the count logged. */
  readonly maxBacklogBytes?: number;
  /** Bytes of the reserve beside the log; default 64 KiB; 0: none. */
  readonly ballastBytes?: number;
  /** Wait before the first retry in ms, doubled for each further one up to five times as long; default 1000. */
  readonly retryAfter?: number;
  /** Longest that `close` goes on in ms when nothing reaches the disk; default 800. */
  readonly closeWithin?: number;
  readonly now?: () => number;
  readonly disk?: Disk;
}

const BATCH = 1 << 20; // bytes in one write
const BACKLOG = 64 << 20;
const SLOWEST = 5; // times the first wait
const CLOSE_WITHIN = 800;
const CLOSE_RETRY = 50;

/**
 * The alarm log: JSON Lines in canonical form (RFC 8785), each carrying the SHA-256 of the line before it as
 * `previous`. A record counts as kept when fdatasync has returned, and only then is its `onDurable` called, in order.
 * One write is under way at a time; what comes meanwhile goes into the next.
 */
export class AlarmLog {
  private readonly backlog: Backlog;
  private readonly ballast: Ballast;
  /** Records that go before those of the backlog: what joins a new file to the one before, and the opening one. */
  private continued: Sealed | null = null;
  private opened: Sealed | null = null;
  private previous = ORIGIN;
  private done = 0; // records of the backlog that are durable
  private waiters: { readonly upTo: number; readonly resolve: () => void }[] = [];
  private pumping: Promise<void> | null = null;
  private making: Promise<unknown> = Promise.resolve();
  private retry: NodeJS.Timeout | null = null;
  private recovery: NodeJS.Timeout | null = null;
  private delay: number;
  private most = BATCH; // bytes of the next write: less while the disk is full
  private tried = 0; // records in the last write, and their bytes
  private triedBytes = 0;
  private progressAt = 0;
  private cause: string | null = null;
  private said: string | null = null;
  private reserveGone = false;
  private vanishedBefore = false;
  private turnWanted = false;
  private hasOpened = false;
  private isFresh = false; // the file holds no record of the backlog yet
  private closing: Promise<void> | null = null;

  private constructor(
    private readonly file: LogFile,
    private readonly lock: Lock | null,
    private readonly options: AlarmLogOptions,
    private readonly now: () => number,
  ) {
    this.backlog = new Backlog(options.maxBacklogBytes ?? BACKLOG, now);
    this.ballast = new Ballast(file.path, options.ballastBytes ?? BALLAST);
    this.delay = this.firstDelay;
  }

  /**
   * Opens the log for this process alone and writes its opening record. Missing folders are created (0750), the file too (0640).
   * A full disk is no error here: it is said through `onTrouble`, and records wait.
   * @throws UserError where another process writes the log, or where it is none, or may not be written
   */
  static open(file: string, options: AlarmLogOptions): AlarmLog {
    const now = options.now ?? Date.now;
    let path = file;
    try {
      path = placeOf(file);
      makeFoldersAbove(path);
      const lock = lockIfRoom(path, options);
      const log = new AlarmLog(new LogFile(path, options.disk ?? realDisk, options.onNote, now), lock, options, now);
      try {
        log.begin();
      } catch (error) {
        if (!isFull(error)) {
          lock?.release();
          throw error;
        }
        log.wake(); // meets the error again, and deals with it
      }
      return log;
    } catch (error) {
      throw asUserError(error, path);
    }
  }

  /**
   * Takes a record and returns at once.
   * @param record a JSON object; its key `previous` is the chain's
   * @param onDurable called once the record is on the disk; never for one that was dropped at the bound
   * @throws TypeError or RangeError for what can be no record (a cycle, a bigint, more than a line holds); Error after `close`
   */
  append(record: object, onDurable: () => void): void {
    if (this.closing) throw new Error('The alarm log is closed.');
    if (!this.backlog.add(seal(record), onDurable)) this.say(this.cause ?? 'The disk takes alarms more slowly than they come.');
    this.wake();
  }

  /** Resolves when every record appended so far is on the disk, or its loss is. Stays open while the disk takes none. */
  durable(): Promise<void> {
    const upTo = this.backlog.taken + (this.backlog.lost > 0 ? 1 : 0);
    if (this.isDurable(upTo)) return Promise.resolve();
    return new Promise((resolve) => this.waiters.push({ upTo, resolve }));
  }

  /** Starts a new file behind what is being written; where the file was moved or replaced from outside, opens the one now there. */
  rotate(): void {
    if (this.closing) return;
    this.turnWanted = true;
    this.wake();
  }

  /** Writes what waits and a closing record, as far as that succeeds within the bound; says how many records were not written. */
  close(): Promise<void> {
    this.closing ??= this.finish();
    return this.closing;
  }

  private get firstDelay(): number {
    return this.options.retryAfter ?? 1000;
  }

  private begin(): void {
    const { opening = { event: 'opened', time: this.time() } } = this.options;
    const { hash, from, tornBytes } = this.file.open();
    this.previous = hash ?? ORIGIN;
    this.opened = seal({ ...opening, ...(from !== null && { from }), ...(tornBytes > 0 && { tornBytes }) });
    this.hasOpened = true;
    this.making = this.ballast.make();
    this.wake();
  }

  private time(): string {
    return new Date(this.now()).toISOString();
  }

  private isDurable(upTo: number): boolean {
    return this.done >= upTo && this.hasOpened && !this.opened && !this.continued;
  }

  private get hasWork(): boolean {
    return this.turnWanted || !this.isDurable(this.backlog.taken);
  }

  private wake(): void {
    if (this.retry || this.pumping) return;
    this.pumping = this.pump().finally(() => {
      this.pumping = null;
    });
  }

  private async pump(): Promise<void> {
    await Promise.resolve(); // what is appended in the same turn goes into one write
    while (this.hasWork) {
      try {
        await this.step();
      } catch (error) {
        if (!this.overcome(error)) return;
      }
    }
  }

  private async step(): Promise<void> {
    const { file, backlog } = this;
    if (!this.hasOpened) this.begin();
    if (!file.isUsable) this.goOn(await file.reopen());
    if (this.turnWanted) await this.turn();
    const headers = [this.continued, this.opened].filter((header) => header !== null);
    const lead = headers.reduce((sum, { bytes }) => sum + bytes, 0);
    const room = this.options.maxBytes - file.end;
    const isNew = file.end === 0 || this.isFresh;
    const next = lead || (backlog.peek(0, 1)[0]?.record.bytes ?? 0);
    if (!isNew && next > room) return this.turn();
    const batch = backlog.peek(Math.min(this.most, room) - lead, lead > 0 ? 0 : 1);
    this.tried = headers.length + batch.length;
    this.triedBytes = batch.reduce((sum, { record }) => sum + record.bytes, lead);
    if (this.tried > 0) await this.write(headers, batch);
  }

  private async write(headers: readonly Sealed[], batch: readonly Waiting[]): Promise<void> {
    const { file } = this;
    let text = '';
    let hash = this.previous;
    for (const record of [...headers, ...batch.map((waiting) => waiting.record)]) {
      const linked = join(record, hash);
      text += linked.line + '\n';
      hash = linked.hash;
    }
    const isFresh = file.end === 0 && batch.length === 0;
    await file.commit(Buffer.from(text));
    this.previous = hash;
    this.isFresh = isFresh;
    if (headers.length > 0) this.continued = this.opened = null;
    this.backlog.remove(batch.length);
    this.done += batch.length;
    for (const { onDurable } of batch) callSafely(onDurable);
    this.answer();
    this.delay = this.firstDelay;
    this.most = Math.min(this.most * 2, BATCH);
    this.progressAt = performance.now();
    this.vanishedBefore = false;
    if (this.said !== null) await this.recover();
  }

  private answer(): void {
    this.waiters = this.waiters.filter(({ upTo, resolve }) => {
      if (!this.isDurable(upTo)) return true;
      resolve();
      return false;
    });
  }

  /** Rotates, or follows a rotation from outside. */
  private async turn(): Promise<void> {
    const { file } = this;
    if (file.end > 0 && !(await file.isMoved())) await file.moveAway();
    this.goOn(await file.reopen());
    this.turnWanted = false;
  }

  private goOn(from: string | null): void {
    if (from !== null) this.continued ??= seal({ event: 'continued', time: this.time(), from });
  }

  /** @returns whether to try again at once; otherwise a timer will */
  private overcome(error: unknown): boolean {
    const { file, options, ballast } = this;
    file.suspect();
    if (error instanceof Vanished && !this.vanishedBefore) {
      this.vanishedBefore = true;
      options.onNote(`${error.message} A new one was begun; what was in memory goes there.`);
      return true;
    }
    if (isFull(error) && ballast.release()) {
      this.reserveGone = true;
      this.say(`${describe(error, file.path)} The reserve beside it was released, so that alarms still get through for a while.`);
      return true;
    }
    if ((isFull(error) || isTooLarge(error)) && this.tried > 1) {
      this.most = Math.max(1, Math.min(this.most, this.triedBytes) >> 1); // room for some is better than none
      return true;
    }
    if (isTooLarge(error) && !this.isFresh) this.turnWanted = true;
    this.say(`${describe(error, file.path)} Alarms wait in memory and are written as soon as that is possible.`);
    this.retry = setTimeout(() => {
      this.retry = null;
      this.wake();
    }, this.delay);
    this.delay = Math.min(this.delay * 2, this.firstDelay * SLOWEST);
    return false;
  }

  private say(cause: string): void {
    this.cause = cause;
    const sentence = this.backlog.lost > 0 ? `${cause} The memory for waiting alarms is used up: new ones are dropped and counted.` : cause;
    if (this.said === sentence) return;
    this.said = sentence;
    this.options.onTrouble(sentence);
  }

  /** After a write that succeeded: all is well once nothing more is dropped and the reserve stands again. */
  private async recover(): Promise<void> {
    if (this.backlog.lost > 0) return;
    const stands = await this.ballast.make();
    if (this.reserveGone && !stands) {
      this.recovery ??= setTimeout(() => {
        this.recovery = null;
        if (!this.retry && !this.closing && this.said !== null) void this.recover();
      }, this.firstDelay * SLOWEST).unref();
      return;
    }
    this.reserveGone = false;
    this.cause = this.said = null;
    this.options.onTrouble(null);
  }

  private async finish(): Promise<void> {
    this.progressAt = performance.now();
    await this.flush();
    const left = this.backlog.length + this.backlog.lost;
    if (!this.hasWork) {
      this.backlog.add(seal({ event: 'closed', time: this.time() }), () => undefined);
      await this.flush();
    }
    if (this.pumping) await within(this.closeWithin / 10, this.pumping);
    if (this.retry) clearTimeout(this.retry);
    if (this.recovery) clearTimeout(this.recovery);
    if (left > 0) {
      const why = this.cause === null ? '' : ` ${this.cause.slice(0, this.cause.indexOf('. ') + 1)}`;
      this.options.onTrouble(`${left === 1 ? 'One record' : `${left} records`} could not be written to the alarm log before the end: lost.${why}`);
    }
    if (this.pumping) return; // a call of the system hangs: the file and the lock go with the process
    this.file.drop();
    this.lock?.release();
  }

  private get closeWithin(): number {
    return this.options.closeWithin ?? CLOSE_WITHIN;
  }

  /** Writes what waits, trying again and again until nothing has reached the disk for nine tenths of the time. */
  private async flush(): Promise<void> {
    const left = () => this.progressAt + this.closeWithin * 0.9 - performance.now();
    for (;;) {
      if (this.retry) clearTimeout(this.retry);
      this.retry = null;
      this.wake();
      await within(left(), Promise.all([this.pumping, this.making]));
      if (!this.hasWork || left() <= 0) return;
      await pause(Math.min(CLOSE_RETRY, left()));
    }
  }
}

function lockIfRoom(path: string, { onNote }: AlarmLogOptions): Lock | null {
  try {
    return takeLock(path);
  } catch (error) {
    if (!isFull(error)) throw error;
    onNote(`${describe(error, path)} The lock beside it could not be made: see that no second kilter writes this log.`);
    return null;
  }
}

function callSafely(onDurable: () => void): void {
  try {
    onDurable();
  } catch (error) {
    queueMicrotask(() => {
      throw error; // loud, but the log goes on
    });
  }
}

async function within(ms: number, work: Promise<unknown>): Promise<void> {
  let timer: NodeJS.Timeout | undefined;
  const timeout = new Promise((resolve) => (timer = setTimeout(resolve, Math.max(0, ms))));
  await Promise.race([work, timeout]);
  clearTimeout(timer);
}

function pause(ms: number): Promise<void> {
  return new Promise((resolve) => setTimeout(resolve, Math.max(0, ms)));
}
