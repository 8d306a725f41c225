import { PassThrough, Writable } from 'node:stream';
import { setTimeout as wait } from 'node:timers/promises';
import xterm from '@xterm/headless';
import { openScreen, type ScreenHandle, type ScreenOptions } from '../../src/screen/shell.js';
import type { StandView } from '../../src/screen/model.js';

/** A terminal in memory: what is written to it is interpreted by xterm.js, and kept as it came. */
export class FakeTty {
  readonly terminal;
  readonly input = Object.assign(new PassThrough(), { isTTY: true, isRaw: false, setRawMode: () => undefined });
  readonly output;
  /** Everything that was written. */
  wire = '';

  constructor(public columns = 80, public rows = 24) {
    this.terminal = new xterm.Terminal({ cols: columns, rows, allowProposedApi: true, scrollback: 0 });
    const output = new Writable({
      decodeStrings: false,
      write: (chunk: string | Buffer, _encoding, done) => {
        const text = String(chunk);
        this.wire += text;
        this.terminal.write(text, done);
      },
    });
    this.output = Object.assign(output, { isTTY: true, columns, rows });
  }

  resize(columns: number, rows: number): void {
    Object.assign(this.output, { columns, rows });
    this.terminal.resize(columns, rows);
    this.output.emit('resize');
  }

  /** Until all that was written has been taken in. */
  async settle(): Promise<void> {
    do await new Promise<void>((done) => setImmediate(() => this.terminal.write('', done)));
    while (this.output.writableLength > 0);
  }

  lines(): string[] {
    const { active } = this.terminal.buffer;
    return Array.from({ length: this.terminal.rows }, (_, y) => active.getLine(y)?.translateToString(true) ?? '');
  }

  text(): string {
    return this.lines().join('\n');
  }

  /** Palette indices of all foregrounds and backgrounds on the screen; -1 is the terminal's own. */
  colours(): Set<number> {
    const found = new Set<number>();
    for (let y = 0; y < this.terminal.rows; y++)
      for (let x = 0; x < this.terminal.cols; x++) {
        const cell = this.terminal.buffer.active.getLine(y)!.getCell(x)!;
        found.add(cell.isFgDefault() ? -1 : cell.getFgColor()).add(cell.isBgDefault() ? -1 : cell.getBgColor());
      }
    return found;
  }

  /** Colour of the first place where the text stands; null: it stands nowhere. */
  colourOf(text: string): number | null {
    for (const [y, line] of this.lines().entries()) {
      const x = line.indexOf(text);
      if (x < 0) continue;
      const cell = this.terminal.buffer.active.getLine(y)!.getCell(x)!;
      return cell.isFgDefault() ? -1 : cell.getFgColor();
    }
    return null;
  }
}

export interface Shown {
  readonly tty: FakeTty;
  readonly screen: ScreenHandle;
  /** What the owner was told, in order. */
  readonly told: string[];
  /** Keys as a terminal sends them; then a frame. */
  type(...keys: string[]): Promise<void>;
  /** One frame more. */
  frame(): Promise<void>;
}

export const COLOUR_TERMINAL = { TERM: 'xterm-256color', LANG: 'C.UTF-8' };

/** Opens the screen on a terminal in memory and draws it once. */
export async function show(
  view: StandView | (() => StandView),
  { columns = 80, rows = 24, env = COLOUR_TERMINAL }: { columns?: number; rows?: number; env?: NodeJS.ProcessEnv } = {},
): Promise<Shown> {
  const tty = new FakeTty(columns, rows);
  const told: string[] = [];
  const screen = openScreen({
    env,
    view: typeof view === 'function' ? view : () => view,
    select: (channel) => {
      if (told.at(-1) !== channel) told.push(channel);
    },
    onQuit: () => told.push('quit'),
    onSignal: (signal) => told.push(signal),
    onFatal: (error) => told.push(`fatal: ${error instanceof Error ? error.message : String(error)}`),
    input: tty.input as unknown as NonNullable<ScreenOptions['input']>,
    output: tty.output as unknown as NonNullable<ScreenOptions['output']>,
    rate: 0.01, // frames come when a test asks for them
  });
  await tty.settle();
  const frame = async (): Promise<void> => {
    screen.refresh();
    await tty.settle();
  };
  await frame();
  return {
    tty, screen, told, frame,
    type: async (...keys) => {
      for (const key of keys) {
        tty.input.write(key);
        await wait(2);
        await tty.settle();
      }
      await frame();
    },
  };
}
