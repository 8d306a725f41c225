/** Rows of the screen, from top to bottom; each part's first row and height. */
export interface Layout {
  readonly width: number;
  readonly height: number;
  readonly roster: readonly [row: number, height: number];
  readonly title: number;
  readonly picture: readonly [row: number, height: number];
  /** Height 0 where there is no room. */
  readonly spread: readonly [row: number, height: number];
  readonly lower: readonly [row: number, height: number];
  readonly hint: number;
  readonly status: number;
}

export const SMALLEST = { width: 60, height: 16 } as const;

/** Shares out the rows: the roster takes what its channels need up to a third, alarms a sixth, the picture the rest. */
export function layout(width: number, height: number, channels: number): Layout {
  const inner = height - 4; // header, title, hint, status
  const roster = Math.max(1, Math.min(channels, Math.floor(inner / 3)));
  const lower = Math.max(4, Math.floor(inner / 6));
  const spread = inner - roster - lower >= 14 ? 3 : 0;
  const picture = inner - roster - lower - spread;
  const title = 1 + roster;
  return {
    width,
    height,
    roster: [1, roster],
    title,
    picture: [title + 1, picture],
    spread: [title + 1 + picture, spread],
    lower: [title + 1 + picture + spread, lower],
    hint: height - 2,
    status: height - 1,
  };
}
