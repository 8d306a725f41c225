/** ASCII stand-ins for the characters that views draw with, each one cell wide. */
const CELLS: Readonly<Record<string, string>> = {
  '●': '*', '•': 'o', '■': '#', '□': '?', '○': 'o', '▸': '>', '◂': '<', '▴': '^', '▾': 'v', '┼': '+', '┌': '+', '┐': '+', '└': '+', '┘': '+', '│': '|', '┊': ':', '─': '-', '━': '=', '·': '.', '…': '~', '−': '-', '–': '-',
  '↑': '^', '↓': 'v', '█': '#', '▀': '"', '▁': '_', '▂': '_', '▃': '.', '▄': '-', '▅': '-', '▆': '=', '▇': '^', '²': '2', '³': '3', '×': 'x', 'µ': 'u', 'μ': 'u', '\u00a0': ' ', '\u2009': ' ',
};

/** Stand-ins in running text, where there is room for more than a cell. */
const WORDS: Readonly<Record<string, string>> = { '±': '+/-', 'σ': 's', '°': 'deg', 'Ω': 'ohm', '‰': 'per mil', '≤': '<=', '≥': '>=' };

/** Stand-ins that the font of the Linux console has (code page 437). */
const CONSOLE: Readonly<Record<string, string>> = {
  '●': '■', '▸': '►', '◂': '◄', '▴': '▲', '▾': '▼', '┊': '¦', '━': '═', '…': '~', '▁': '_', '▂': '_', '▃': '▄', '▅': '▄', '▆': '█', '▇': '█', '□': '?', 'σ': 's',
};

export const consoleCell = (character: string): string => CONSOLE[character] ?? character;

/** A cell's character where the terminal has nothing but ASCII. */
export const plainCell = (character: string): string => (character <= '~' ? character : (CELLS[character] ?? '?'));

/** Text in nothing but ASCII. */
export const plainText = (text: string): string => text.replace(/[^ -~]/gu, (character) => WORDS[character] ?? plainCell(character));
