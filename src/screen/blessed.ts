// The one place that imports blessed. It is CommonJS whose exports Node cannot name: only the default import works at
// run time. Its published types leave out what is declared here.
import blessedDefault, { type Widgets } from 'blessed';

/** One character cell: attributes as (flags << 18) | (foreground << 9) | background, and the character. */
export type Cell = [attributes: number, character: string];
export type CellLine = Cell[] & { dirty?: boolean };

interface Program {
  output: NodeJS.WriteStream;
  setMouse(modes: Record<string, boolean>, on: boolean): void;
  enableMouse(): void;
  write(text: string): boolean;
  flush(): void;
  /** The same, by the name under which blessed's own buffer calls it. */
  _owrite(text: string): boolean;
}

export interface BlessedScreen extends Omit<Widgets.Screen, 'program' | 'tput'> {
  lines: CellLine[];
  program: Program;
  tput: { brokenACS: boolean };
  draw(start: number, end: number): void;
  enter(): void;
  leave(): void;
  alloc(dirty?: boolean): void;
}

interface Blessed {
  screen(options: Record<string, unknown>): Widgets.Screen;
  Tput: { ipaths: unknown[] };
}

export const blessed = blessedDefault as unknown as Blessed;
