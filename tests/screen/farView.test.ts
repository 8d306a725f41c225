import { afterEach, describe, expect, it } from 'vitest';
import { drawFar } from '../../src/screen/far.js';
import { Raster } from '../../src/screen/raster.js';
import { theme } from '../../src/screen/theme.js';
import type { SourceView, StandView } from '../../src/screen/model.js';
import { show, type Shown } from './fakeTty.js';
import { channel, inventedStand, troubledStand } from './inventedStand.js';

let shown: Shown | null = null;
afterEach(() => {
  shown?.screen.close();
  shown = null;
});

/** The rows of the large letters, as drawn. */
function letters(view: StandView, width = 80): string[] {
  const r = new Raster('braille');
  r.resize(width, 24);
  r.clear();
  drawFar(r, theme(256), view, 1, 21);
  return Array.from({ length: 5 }, (_, y) => Array.from({ length: width }, (_, x) => r.glyph((y + 2) * width + x)).join('').trimEnd());
}

const source = (phase: SourceView['phase']): SourceView => ({ source: 'plc', phase, sentence: '-', faults: 0 });

describe('"all well" is said only while nothing is amiss', () => {
  const well = letters(inventedStand());
  it.each<[string, StandView]>([
    ['a source is lost', inventedStand({ sources: [source('open'), source('lost')] })],
    ['the alarm log is in trouble', inventedStand({ logTrouble: 'the disk is full' })],
    ['all sources have ended', inventedStand({ sources: [source('ended'), source('stopped')] })],
    ['a channel is settling', inventedStand({ channels: [channel(0), channel(1, { state: 'settling', settled: [3, 500], band: null })] })],
    ['a channel is in alarm', inventedStand({ channels: [channel(0), channel(1, { state: 'alarm' })] })],
    ['there are no channels', inventedStand({}, 0)],
  ])('not when %s', (_, view) => {
    expect(letters(view)).not.toEqual(well);
    expect(letters(view).join('')).toContain('█');
  });

  it('but still when one source of several has ended', () => {
    expect(letters(inventedStand({ sources: [source('open'), source('ended')] }))).toEqual(well);
  });
});

it.each([
  ['bearing-vibration', false],
  ['bearing-vibration-of-pump-7', true],
])('%s is set in narrower letters, and ends in dots where there is still no room: %s', (name, dots) => {
  const width = 80;
  const r = new Raster('braille');
  r.resize(width, 40);
  r.clear();
  drawFar(r, theme(256), inventedStand({ channels: [channel(0, { channel: name, state: 'alarm' })] }), 1, 37);
  const rows = Array.from({ length: 40 }, (_, y) => Array.from({ length: width }, (_, x) => r.glyph(y * width + x)).join('').trimEnd());
  const bottom = rows.findLastIndex((row) => row.includes('█')); // of the name, which stands below the word
  expect(rows[bottom]!.endsWith('█   █   █')).toBe(dots);
  expect(rows[bottom - 4]!.length).toBeGreaterThan(60);
});

it('f shows it and takes it away; a lost source has its colour', async () => {
  shown = await show({ ...troubledStand(), alarms: [], channels: inventedStand().channels });
  await shown.type('f');
  expect(shown.tty.text()).toMatch(/█{4,}/);
  expect(shown.tty.colourOf('██')).toBe(220);
  await shown.type('f');
  expect(shown.tty.text()).toContain('[°C]');
});
