import type { AlarmLogOptions } from './alarmLogOptions.js';
import { Alert } from './alert.js';
import { Backlog, type Waiting } from './backlog.js';
import { Ballast, BALLAST } from './ballast.js';
import { join, ORIGIN, seal, type Sealed } from './chain.js';
import { realDisk } from './disk.js';
import { takeLock, type Lock } from './lock.js';
import { LogFile, Vanished } from './logFile.js';
import { makeFoldersAbove, placeOf } from './place.js';
import { Retry } from './retry.js';
import { asUserError, describe, isFull, isTooLarge } from './trouble.js';

const BATCH = 1 << 20; // bytes in one write
const BACKLOG = 64 << 20;
const RETRY_AFTER = 1000; // ms, as those below
const SLOWEST = 5; // times the first wait
const RECOVER_AFTER = 5000;
const TURN_AGAIN = 60_000;
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
  private readonly alert: Alert;
  private readonly retry: Retry;
  /** Records that go before those of the backlog: what joins a new file to the one before, and the opening one. */
  private continued: Sealed | null = null;
  private opened: Sealed | null = null;
  private previous = ORIGIN;
  private done = 0; // records of the backlog that are durable
  private waiters: { readonly upTo: number; readonly resolve: () => void }[] = [];
  private pumping: Promise<void> | null = null;
  private making: Promise<unknown> = Promise.resolve();
  private recovery: NodeJS.Timeout | null = null;
  private most = BATCH; // bytes of the next write: less while the disk is full
  private tried = 0; // records in the last write, and their bytes
  private triedBytes = 0;
  private progressAt = 0;
  private vanishedBefore = false;
  private turnWanted = false;
  private turnAgainAt = 0; // a rotation that failed must not hold up alarms
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
    this.alert = new Alert(options.onTrouble);
    this.retry = new Retry(options.retryAfter ?? RETRY_AFTER, SLOWEST);
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
    if (!this.backlog.add(seal(record), onDurable)) this.say(this.alert.cause ?? 'The disk takes alarms more slowly than they come.');
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
    if (this.retry.isArmed || this.pumping) return;
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
    const mayTurn = performance.now() >= this.turnAgainAt;
    const next = lead || (backlog.peek(0, 1)[0]?.record.bytes ?? 0);
    if (mayTurn && next > room && file.end > 0 && !this.isFresh) return this.turn();
    const batch = backlog.peek((mayTurn ? Math.min(this.most, room) : this.most) - lead, lead > 0 ? 0 : 1);
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
    this.retry.reset();
    this.most = Math.min(this.most * 2, BATCH);
    this.progressAt = performance.now();
    this.vanishedBefore = false;
    if (this.alert.stands) await this.recover();
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
    this.turnWanted = false;
    if (file.end > 0 && !(await file.isMoved())) {
      try {
        await file.moveAway();
      } catch (error) {
        this.turnAgainAt = performance.now() + TURN_AGAIN;
        this.options.onNote(`The alarm log cannot be rotated and goes on growing. ${describe(error, file.path)}`);
        return;
      }
    }
    this.goOn(await file.reopen());
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
      this.say(`${describe(error, file.path)} The reserve beside it was released, so that alarms still get through for a while.`);
      return true;
    }
    if ((isFull(error) || isTooLarge(error)) && this.tried > 1) {
      this.most = Math.max(1, Math.min(this.most, this.triedBytes) >> 1); // room for some is better than none
      return true;
    }
    if (isTooLarge(error) && !this.isFresh) this.turnWanted = true;
    this.say(`${describe(error, file.path)} Alarms wait in memory and are written as soon as that is possible.`);
    this.retry.arm(() => this.wake());
    return false;
  }

  private say(cause: string): void {
    this.alert.say(cause, this.backlog.lost > 0);
  }

  /** After a write that succeeded: all is well once nothing more is dropped and a reserve that was given up stands again. */
  private async recover(): Promise<void> {
    if (this.backlog.lost > 0) return;
    if ((await this.ballast.make()) || !this.ballast.isGivenUp) {
      this.alert.withdraw();
      return;
    }
    this.recovery ??= setTimeout(() => {
      this.recovery = null;
      if (!this.retry.isArmed && !this.closing && this.alert.stands) void this.recover();
    }, RECOVER_AFTER).unref();
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
    this.retry.disarm();
    if (this.recovery) clearTimeout(this.recovery);
    if (left > 0) this.alert.sayLost(left);
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
      this.retry.disarm();
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
