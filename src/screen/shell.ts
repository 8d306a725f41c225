import type { WriteStream } from 'node:tty';
import { UserError } from '../text/errors.js';
import { clean } from '../text/clean.js';
import { RasterCanvas } from './canvas.js';
import { drawFrame } from './frame.js';
import { holdChannels, withHeld } from './hold.js';
import { TokenInput } from './input.js';
import type { Layout } from './layout.js';
import type { ChannelView, StandView } from './model.js';
import { Raster } from './raster.js';
import { restoreOnEnd } from './restore.js';
import { assumeSize, openBlessed, terminalProfile } from './terminal.js';
import { theme } from './theme.js';
import { act, initialUi, selectedIndex, type Action } from './ui.js';

export interface ScreenOptions {
  readonly env: NodeJS.ProcessEnv;
  /** The stand as it is; asked once a frame. */
  readonly view: () => StandView;
  /** Told which channel's statistics are wanted. */
  readonly select: (channel: string) => void;
  readonly onQuit: () => void;
  /** A fault inside kilter; the terminal is already restored. */
  readonly onFatal: (error: unknown) => void;
  /** A signal ended the screen; the terminal is already restored. */
  readonly onSignal: (signal: NodeJS.Signals) => void;
  readonly input?: NodeJS.ReadStream;
  readonly output?: NodeJS.WriteStream;
  /** Frames a second at most. */
  readonly rate?: number;
}

export interface ScreenHandle {
  /** Draws now, unless the terminal still has bytes to take. */
  refresh(): void;
  /** A passing word in the status line. */
  message(text: string): void;
  close(): void;
}

/** @throws UserError where there is no terminal that a screen can be shown on; the sentence names what to use instead */
export function checkTerminal(env: NodeJS.ProcessEnv, input: { isTTY?: boolean }, output: { isTTY?: boolean }): void {
  const { unusable } = terminalProfile(env);
  if (!input.isTTY || !output.isTTY) throw new UserError('There is no terminal to show the screen on.', "'kilter guard' (or 'kilter demo --headless') needs none.");
  if (unusable) throw new UserError(`This terminal cannot show the screen: ${unusable}.`, "Set TERM, or use 'kilter guard', which needs no screen.");
}

const KEYS: Readonly<Record<string, Action>> = {
  up: 'up', k: 'up', down: 'down', j: 'down', pageup: 'pageUp', pagedown: 'pageDown', home: 'home', end: 'end',
  space: 'hold', '?': 'help', f: 'far', enter: 'figures', '+': 'wider', '=': 'wider', '-': 'narrower', n: 'nextAlarm',
};
const MESSAGE_FOR = 8000; // ms that a passing word stays

/** Opens the screen and draws until it is closed. */
export function openScreen(options: ScreenOptions): ScreenHandle {
  const profile = terminalProfile(options.env);
  const output = options.output ?? process.stdout;
  unblock(output);
  assumeSize(output, options.env);
  const screen = openBlessed(profile, new TokenInput(options.input ?? process.stdin), output);
  const raster = new Raster(profile.dots);
  const colours = theme(profile.colours);
  const ui = initialUi();
  let held: ReadonlyMap<string, ChannelView> | null = null;
  let view = options.view();
  let places: Layout | null = null;
  let messageUntil = 0;
  let open = true;
  let drawn = false;

  new RasterCanvas(screen, raster, () => (places = drawFrame(raster, colours, view, ui))).attach();
  const draw = (): void => {
    if (!open || output.writableLength > 0) return; // a slow terminal is given fewer frames, never a queue
    try {
      if (ui.message && performance.now() > messageUntil) ui.message = null;
      if (drawn) view = options.view(); // once a frame
      if (held) view = withHeld(view, held);
      drawn = true;
      const channel = view.channels[selectedIndex(view, ui)];
      if (channel) options.select(channel.channel);
      screen.render();
    } catch (error) {
      close();
      options.onFatal(error);
    }
  };
  const close = (): void => {
    if (!open) return;
    open = false;
    clearInterval(timer);
    restorer.restore();
    restorer.release();
  };
  const restorer = restoreOnEnd(
    screen,
    output,
    (signal) => {
      close();
      options.onSignal(signal);
    },
    (error) => {
      close();
      options.onFatal(error);
    },
  );
  const quit = (): void => {
    close();
    options.onQuit();
  };

  screen.on('keypress', (character: string | undefined, key: { full: string }) => {
    if (key.full === 'C-c') { quit(); return; }
    if (ui.help) {
      ui.help = false; // any key closes the help, and does nothing else
      draw(); return;
    }
    if (key.full === 'q') { quit(); return; }
    if (key.full === 'return') return; // Enter comes as both `enter` and `return`
    const action = KEYS[key.full] ?? KEYS[character ?? ''];
    if (action === undefined) return;
    act(ui, action, view, places?.roster[1] ?? 1);
    if (action === 'hold') held = ui.held ? holdChannels(view) : null;
    draw();
  });
  screen.on('mouse', (data: { action: string; y: number }) => {
    if (ui.help) {
      if (data.action !== 'mousedown') return;
      ui.help = false; // as any key does
    } else if (data.action === 'wheelup' || data.action === 'wheeldown') act(ui, data.action === 'wheelup' ? 'up' : 'down', view, 1);
    else if (data.action === 'mousedown' && places && !ui.far && data.y >= places.roster[0] && data.y < places.roster[0] + places.roster[1])
      ui.selected = view.channels[ui.first + data.y - places.roster[0]]?.channel ?? ui.selected;
    else return;
    draw();
  });
  screen.on('resize', draw);
  screen.program.enableMouse();
  const timer = setInterval(draw, 1000 / (options.rate ?? 8));
  draw();
  return {
    refresh: draw,
    message: (text) => {
      ui.message = clean(text, 300);
      messageUntil = performance.now() + MESSAGE_FOR;
    },
    close,
  };
}

/** Node writes to a terminal synchronously: one that no longer reads would stop the watch, alarms included. */
function unblock(output: WriteStream): void {
  (output as unknown as { _handle?: { setBlocking?(blocking: boolean): number } })._handle?.setBlocking?.(false);
}
