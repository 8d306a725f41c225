import { speaksUtf8 } from '../text/locale.js';
import { blessed, type BlessedScreen } from './blessed.js';
import { consoleCell, plainCell } from './plain.js';

/** What a terminal can show. Decided here, and not by blessed, which cannot read today's terminal descriptions. */
export interface TerminalProfile {
  /** null: usable; else why not, as the rest of a sentence. */
  readonly unusable: string | null;
  /** The description that blessed brings along itself and is to use. */
  readonly description: 'xterm' | 'xterm-256color' | 'linux';
  readonly colours: 0 | 8 | 16 | 256;
  readonly unicode: boolean;
  /** Braille cells; else block elements (the Linux console has no braille), else ASCII. */
  readonly dots: 'braille' | 'block' | 'ascii';
  readonly mouse: boolean;
}

/** @param env TERM, COLORTERM, NO_COLOR, and LC_ALL, LC_CTYPE, LANG in the precedence of POSIX */
export function terminalProfile(env: NodeJS.ProcessEnv): TerminalProfile {
  const term = (env['TERM'] ?? '').toLowerCase();
  const unicode = speaksUtf8(env);
  const linux = term.startsWith('linux');
  const mono = (env['NO_COLOR'] ?? '') !== '' || /^(vt\d|ansi-m|xterm-mono)/.test(term);
  const sixteen = /16color/.test(term);
  const many = /256color|direct|kitty|alacritty|ghostty|wezterm|foot/.test(term) || /truecolor|24bit/i.test(env['COLORTERM'] ?? '');
  return {
    unusable: term === '' ? 'TERM is not set' : term === 'dumb' || term === 'unknown' ? `TERM is '${term}'` : null,
    description: linux ? 'linux' : many || sixteen ? 'xterm-256color' : 'xterm',
    colours: mono ? 0 : many ? 256 : sixteen ? 16 : 8,
    unicode,
    dots: !unicode ? 'ascii' : linux ? 'block' : 'braille',
    mouse: !linux && !term.startsWith('vt'),
  };
}

/**
 * A serial console seldom knows its size and gives 0 by 0. LINES and COLUMNS say it, else it is taken to be 80 by 24, as
 * terminals were.
 */
export function assumeSize(output: { columns?: number; rows?: number }, env: NodeJS.ProcessEnv): void {
  const given = (text: string | undefined): number | null => (/^[1-9]\d{0,3}$/.test(text ?? '') ? Number(text) : null);
  output.columns ||= given(env['COLUMNS']) ?? 80;
  output.rows ||= given(env['LINES']) ?? 24;
}

/** A blessed screen for the profile. Nothing but ASCII leaves it without UTF-8, and no colour without colours. */
export function openBlessed(profile: TerminalProfile, input: NodeJS.ReadableStream, output: NodeJS.WritableStream): BlessedScreen {
  blessed.Tput.ipaths.length = 0; // its search path for descriptions: it would read files that it cannot parse
  const screen = blessed.screen({
    input,
    output,
    terminal: profile.description,
    forceUnicode: profile.unicode,
    smartCSR: false,
    fastCSR: false,
    useBCE: true,
    dockBorders: false,
    fullUnicode: false,
    resizeTimeout: 60,
    warnings: false,
    sendFocus: false,
  }) as unknown as BlessedScreen;
  screen.tput.brokenACS = true; // line drawing as plain characters
  if (profile.colours === 0 || profile.dots !== 'braille') {
    const draw = screen.draw.bind(screen);
    screen.draw = (start, end) => {
      for (let y = start; y <= end; y++) {
        const line = screen.lines[y];
        if (line?.dirty) for (const cell of line) plain(cell, profile);
      }
      draw(start, end);
    };
  }
  // SGR mouse reports and motion with a button only; blessed would ask for obsolete ones. Pastes are marked, so that they are no keys.
  screen.program.enableMouse = () => {
    output.write('\x1b[?2004h');
    if (profile.mouse) screen.program.setMouse({ vt200Mouse: true, cellMotion: true, sgrMouse: true }, true);
  };
  return screen;
}

const NO_COLOURS = 0x3ffff; // both colours the terminal's own

function plain(cell: [number, string], { colours, dots }: TerminalProfile): void {
  if (colours === 0) cell[0] |= NO_COLOURS;
  if (dots === 'block') cell[1] = consoleCell(cell[1]);
  else if (dots === 'ascii') cell[1] = plainCell(cell[1]);
}
