import { describe, expect, it } from 'vitest';
import { UserError } from '../../src/text/errors.js';
import { rowsOf, wantedChannels, type Name } from './recordingRows.js';

function refusal(text: string, ...names: readonly Name[]): string {
  try {
    rowsOf(text, wantedChannels(...names));
  } catch (error) {
    if (error instanceof UserError) return error.message;
    throw error;
  }
  throw new Error('It was taken.');
}

describe('a recording is refused in a sentence', () => {
  it('where no column is a channel: which there are, and the nearest', () => {
    const said = refusal('time,flwo,temp\n1,2,3\n', 'inlet', 'flow');
    expect(said).toContain('flwo, temp');
    expect(said).toContain("Is 'flwo' the channel flow?");
  });

  it.each([
    ['long CSV', 'time,channel,value\n1,flwo,2\n'],
    ['JSON Lines', '{"time":1,"flwo":2}\n'],
    ['long JSON Lines', '{"time":1,"channel":"flwo","value":2}\n'],
  ])('where no row of %s is of a channel', (_, text) => {
    expect(refusal(text, 'flow')).toContain("Is 'flwo' the channel flow?");
  });

  it.each([['nothing', ''], ['blanks and line ends', ' \n\t\r\n  '], ['a byte order mark alone', '\ufeff']])('where it holds %s', (_, text) => {
    expect(refusal(text, 'flow')).toContain('empty');
  });

  it('where it has no header but numbers', () => {
    expect(refusal('1,41.2\n2,41.3\n', 'flow')).toContain('41.2');
  });

  it('without the control characters of its header', () => {
    expect(refusal('time,\u001b[2Jflow\u0007\n1,2\n', 'inlet')).not.toMatch(/[\u0000-\u001f\u007f-\u009f]/);
  });

  it('but a header without rows is a recording without readings', () => {
    expect(rowsOf('time,flow\n').readings).toEqual([]);
    expect(rowsOf('time,channel,value\n').readings).toEqual([]);
  });
});
