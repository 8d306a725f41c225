import { attributes, BOLD, INVERSE, OWN } from './raster.js';
import type { TerminalProfile } from './terminal.js';

/**
 * The attributes that views draw with. While all is well there is no colour, only the terminal's own and a grey; colour
 * means abnormal, and a word and a shape always go with it. The hues stay apart for people who see few.
 */
export interface Theme {
  readonly plain: number;
  readonly strong: number;
  /** Lines, units, what is of less weight. */
  readonly faint: number;
  readonly chosen: number;
  /** Something stands. */
  readonly alarm: number;
  /** Something needs a look: a source lost, the log in trouble. */
  readonly caution: number;
  /** Not as usual, though nothing is wrong: held, settling, an old value. */
  readonly note: number;
}

export function theme(colours: TerminalProfile['colours']): Theme {
  const base = { plain: attributes(OWN), strong: attributes(OWN, BOLD), chosen: attributes(OWN, INVERSE) };
  switch (colours) {
    case 256:
      return { ...base, faint: attributes(245), alarm: attributes(167, BOLD), caution: attributes(220), note: attributes(75) };
    case 16:
      return { ...base, faint: attributes(8), alarm: attributes(9, BOLD), caution: attributes(11), note: attributes(12) };
    case 8:
      return { ...base, faint: attributes(OWN), alarm: attributes(1, BOLD), caution: attributes(3), note: attributes(6) };
    case 0:
      return { ...base, faint: attributes(OWN), alarm: attributes(OWN, BOLD | INVERSE), caution: attributes(OWN, BOLD), note: attributes(OWN, BOLD) };
  }
}
