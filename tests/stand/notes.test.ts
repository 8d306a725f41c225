import { expect, it } from 'vitest';
import { loadStand } from '../../src/stand/load.js';
import { notes } from '../../src/stand/notes.js';
import { GOOD, standFile } from './files.js';

const noted = (part: string, other: string): string[] => notes(loadStand(standFile(GOOD.replace(part, other))));

it('a stand as it should be has no notes', () => {
  expect(notes(loadStand(standFile(GOOD)))).toEqual([]);
});

it.each([
  ['channels:', '  spare: {stdin: true}\nchannels:', 'No channel comes from the source spare.'],
  ['  bearing:', '  twin: {from: logger/flow, every: 1 s}\n  bearing:', 'twin reads the same as flow.'],
  ['range: [0, 60]', 'range: [0, 40]', 'The centre of flow, 41.2, lies outside what the instrument can report.'],
  ['tolerance: [38, 44]', 'tolerance: [38, 41]', 'The centre of flow, 41.2, lies outside its tolerance.'],
  ['range: [0, 60]', 'range: [100, 200]', 'The tolerance of flow lies outside what the instrument can report.'],
  ['resolution: 0.01', 'resolution: 1', 'flow is read in steps of 1, coarser than two sigmas: most changes of its band will not show.'],
  ['    every: 1 s\n', '', 'bearing does not say how often it is read (every:), so its silence is not watched.'],
  ['learn 500', 'learn 5000', 'bearing settles for 1 h 23 min: until then only its scale, tolerance and silence are watched.'],
])('%j written as %j is noted', (part, other, note) => {
  expect(GOOD).toContain(part);
  expect(noted(part, other)).toContain(note);
});
