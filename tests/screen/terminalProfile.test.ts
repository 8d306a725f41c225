import { describe, expect, it } from 'vitest';
import { checkTerminal } from '../../src/screen/shell.js';
import { assumeSize, terminalProfile } from '../../src/screen/terminal.js';
import { UserError } from '../../src/text/errors.js';

const TTY = { isTTY: true };

describe('what a terminal can show', () => {
  // Precedence of LC_ALL, LC_CTYPE, LANG: POSIX.1-2017, chapter 8.2.
  it.each([
    [{ LC_ALL: 'C', LC_CTYPE: 'C.UTF-8', LANG: 'C.UTF-8' }, 'ascii'],
    [{ LC_CTYPE: 'en_GB.UTF-8', LANG: 'C' }, 'braille'],
    [{ LC_ALL: '', LC_CTYPE: '', LANG: 'de_DE.utf8' }, 'braille'],
    [{ LC_CTYPE: 'POSIX', LANG: 'C.UTF-8' }, 'ascii'],
    [{}, 'ascii'],
  ])('%o draws with %s', (locale, dots) => expect(terminalProfile({ TERM: 'xterm-256color', ...locale }).dots).toBe(dots));

  it.each([
    ['xterm-256color', {}, 256],
    ['tmux-256color', {}, 256],
    ['screen-256color', {}, 256],
    ['xterm-kitty', {}, 256],
    ['xterm', { COLORTERM: 'truecolor' }, 256],
    ['xterm-16color', {}, 16],
    ['xterm', {}, 8],
    ['linux', {}, 8],
    ['vt100', {}, 0],
    ['xterm-256color', { NO_COLOR: '1' }, 0],
    ['xterm-256color', { NO_COLOR: '' }, 256], // no-color.org: only a value that is not empty counts
  ])('%s with %o has %i colours', (TERM, more, colours) => expect(terminalProfile({ TERM, ...more }).colours).toBe(colours));
});

it.each([
  [{ columns: 0, rows: 0 }, {}, { columns: 80, rows: 24 }],
  [{ columns: 0, rows: 0 }, { COLUMNS: '132', LINES: '43' }, { columns: 132, rows: 43 }],
  [{ columns: 0, rows: 0 }, { COLUMNS: '-1', LINES: '1e9' }, { columns: 80, rows: 24 }],
  [{}, { COLUMNS: '' }, { columns: 80, rows: 24 }],
  [{ columns: 100, rows: 30 }, { COLUMNS: '132', LINES: '43' }, { columns: 100, rows: 30 }], // what the terminal says comes first
])('a terminal of %o with %o is taken to be %o', (output: { columns?: number; rows?: number }, env, size) => {
  assumeSize(output, env);
  expect(output).toEqual(size);
});

describe('no screen where none can be shown', () => {
  it.each([
    [{ TERM: 'dumb' }, TTY, TTY],
    [{}, TTY, TTY],
    [{ TERM: 'xterm' }, {}, TTY],
    [{ TERM: 'xterm' }, TTY, {}],
  ])('%o', (env, input, output) => {
    expect(() => checkTerminal(env, input, output)).toThrow(UserError);
    expect(() => checkTerminal(env, input, output)).toThrow(expect.objectContaining({ mend: expect.stringContaining('kilter guard') as string }) as Error);
  });

  it('but on a terminal', () => expect(() => checkTerminal({ TERM: 'xterm' }, TTY, TTY)).not.toThrow());
});
