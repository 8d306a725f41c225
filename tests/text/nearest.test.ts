import { describe, expect, it } from 'vitest';
import { clean } from '../../src/text/clean.js';
import { nearest } from '../../src/text/nearest.js';

describe('nearest word', () => {
  it.each([
    ['bandwith', ['band', 'bandwidth'], 'bandwidth'],
    ['chanels', ['channels', 'sources'], 'channels'],
    ['evrey', ['every', 'range'], 'every'], // neighbours swapped
    ['Unit', ['unit'], 'unit'],
    ['xyz', ['unit', 'from'], null],
    ['', ['unit'], null],
  ])('%s among %j is %s', (word, words, expected) => {
    expect(nearest(word, words)).toBe(expected);
  });
});

describe('cleaned text', () => {
  it.each([
    ['a\u001b[2Jb', 'a·[2Jb'],
    ['\u009b2J', '·2J'],
    ['line\r\nbreak', 'line··break'],
    ['right\u202eleft', 'rightleft'],
    ['fire \u{1f525}', 'fire □'],
    ['漢', '□'],
    ['µm/s²', 'µm/s²'],
  ])('%j becomes %j', (text, expected) => {
    expect(clean(text)).toBe(expected);
  });

  it('is never longer than asked for', () => {
    expect(clean('x'.repeat(10_000), 20)).toBe('x'.repeat(19) + '…');
  });
});
