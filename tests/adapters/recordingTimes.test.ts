import { describe, expect, it } from 'vitest';
import { rowsOf, wantedChannels } from './recordingRows.js';

const timesOf = (...cells: readonly string[]): number[] =>
  rowsOf(`time,flow\n${cells.map((cell) => `${cell},1`).join('\n')}\n`).readings.map(([, time]) => time);

describe('times of a recording', () => {
  // Date.parse of the ECMAScript standard (ECMA-262, 21.4.1.32) stands beside every ISO time with a zone.
  it.each([
    '2026-03-01T08:15:30Z',
    '2026-03-01T08:15:30.5Z',
    '2026-03-01T08:15:30.25Z',
    '2026-03-01T08:15:30.250Z',
    '2024-02-29T23:59:59.999Z',
    '1969-12-31T23:59:59.999Z',
    '2026-03-01T08:15:30+01:00',
    '2026-03-01T08:15:30.125-05:30',
  ])('%s is what the language says it is', (time) => {
    expect(timesOf(time)).toEqual([Date.parse(time)]);
  });

  it('are UTC where no zone is given', () => {
    const utc = Date.UTC(2026, 2, 1, 8, 15, 30, 250);
    expect(timesOf('2026-03-01T08:15:30.250', '2026-03-01 08:15:30.250')).toEqual([utc, utc]);
  });

  it('keep what lies below a millisecond', () => {
    expect(timesOf('2026-03-01T08:15:30.250125Z')).toEqual([Date.UTC(2026, 2, 1, 8, 15, 30, 250) + 0.125]);
  });

  it('pass midnight, months and leap days', () => {
    const iso = ['2024-02-28T23:59:59.900Z', '2024-02-29T00:00:00.000Z', '2024-02-29T23:59:59.900Z', '2024-03-01T00:00:00.000Z'];
    expect(timesOf(...iso)).toEqual(iso.map((time) => Date.parse(time)));
  });

  it('are counted where they are none, and the row is left out', () => {
    const bad = ['2026-02-30T00:00:00Z', '2026-03-01T24:00:01Z', '2026-03-01T08:61:00Z', 'yesterday', '', 'nan', '2026-03-01T08:15:3xZ'];
    const { readings, faults } = rowsOf(`time,flow\n${bad.map((time) => `${time},1`).join('\n')}\n2026-03-01T00:00:00Z,2\n`);
    expect(readings).toEqual([[0, Date.UTC(2026, 2, 1), 2]]);
    expect(faults).toEqual(bad.map(() => 'bad-time'));
  });

  it('are seconds or milliseconds since the epoch, by the size of the first', () => {
    expect(timesOf('1767225600', '1767225600.1', '1767225600.123456')).toEqual([1767225600000, 1767225600100, 1767225600123.456]);
    expect(timesOf('1767225600000', '1767225600100.5')).toEqual([1767225600000, 1767225600100.5]);
    expect(timesOf('0', '0.1', '86400')).toEqual([0, 100, 86_400_000]);
  });

  it('do not change their unit on the way', () => {
    expect(timesOf('1767225600000', '500')).toEqual([1767225600000, 500]);
    expect(rowsOf('time,flow\n1767225600,1\n1767225600000,2\n').faults).toEqual(['bad-time']);
  });

  it('are not guessed at where they may be micro- or nanoseconds', () => {
    expect(rowsOf('time,flow\n1767225600000000,1\n1767225600000000000,1\n').faults).toEqual(['bad-time', 'bad-time']);
  });

  it('are spaced by every from the epoch on where the recording has none, whatever the cells hold', () => {
    const { readings, faults, reader } = rowsOf('flow,inlet\n41,20\n,21\nx,22\n43\n44,24\n', wantedChannels('flow', 'inlet'));
    expect(readings.filter(([slot]) => slot === 0)).toEqual([[0, 0, 41], [0, 300, 43], [0, 400, 44]]);
    expect(readings.filter(([slot]) => slot === 1)).toEqual([[1, 0, 20], [1, 100, 21], [1, 200, 22], [1, 400, 24]]);
    expect(faults).toEqual(['not-a-number', 'missing-field']);
    expect(reader.timed).toBe(false);
  });
});
