import type { StandView } from './model.js';

/** What the user has chosen. */
export interface Ui {
  selected: string | null;
  /** First channel of the roster that is shown. */
  first: number;
  held: boolean;
  help: boolean;
  far: boolean;
  figures: boolean;
  /** Readings that the trend shows. */
  span: number;
  /** A passing word from the program; null: none. */
  message: string | null;
}

export const SPANS: readonly number[] = [60, 120, 300, 600, 1200, 2000];

export function initialUi(): Ui {
  return { selected: null, first: 0, held: false, help: false, far: false, figures: false, span: 120, message: null };
}

/** Place of the chosen channel; 0 where the choice is gone, -1 where there are none. */
export function selectedIndex(view: StandView, ui: Ui): number {
  if (view.channels.length === 0) return -1;
  return Math.max(0, view.channels.findIndex(({ channel }) => channel === ui.selected));
}

export type Action =
  | 'up' | 'down' | 'pageUp' | 'pageDown' | 'home' | 'end' | 'hold' | 'help' | 'far' | 'figures' | 'wider' | 'narrower' | 'nextAlarm';

/** What a key does to what the user sees. @param page rows of the roster */
export function act(ui: Ui, action: Action, view: StandView, page: number): void {
  const last = view.channels.length - 1;
  const at = selectedIndex(view, ui);
  const choose = (index: number): void => {
    ui.selected = view.channels[Math.max(0, Math.min(last, index))]?.channel ?? null;
  };
  switch (action) {
    case 'up':
      { choose(at - 1); return; }
    case 'down':
      { choose(at + 1); return; }
    case 'pageUp':
      { choose(at - page); return; }
    case 'pageDown':
      { choose(at + page); return; }
    case 'home':
      { choose(0); return; }
    case 'end':
      { choose(last); return; }
    case 'hold':
      ui.held = !ui.held;
      return;
    case 'help':
      ui.help = !ui.help;
      return;
    case 'far':
      ui.far = !ui.far;
      return;
    case 'figures':
      ui.figures = !ui.figures;
      return;
    case 'wider':
      ui.span = SPANS[Math.min(SPANS.length - 1, SPANS.indexOf(ui.span) + 1)]!;
      return;
    case 'narrower':
      ui.span = SPANS[Math.max(0, SPANS.indexOf(ui.span) - 1)]!;
      return;
    case 'nextAlarm': {
      for (let step = 1; step <= last + 1; step++) {
        const index = (at + step) % (last + 1);
        if (view.channels[index]!.state === 'alarm') { choose(index); return; }
      }
      return;
    }
  }
}
