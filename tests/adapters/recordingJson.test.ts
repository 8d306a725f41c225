import { describe, expect, it } from 'vitest';
import { rowsOf, wantedChannels } from './recordingRows.js';

const both = wantedChannels('flow', 'inlet');

describe('a JSON Lines recording', () => {
  it('is read in its wide form; null and a key that is not there are missing readings', () => {
    const text = '{"time":1,"flow":41.5,"inlet":20}\n{"inlet":null,"time":2,"note":"x"}\n\n{"time":3,"flow":42}';
    const { readings, faults } = rowsOf(text, both);
    expect(readings).toEqual([[0, 1000, 41.5], [1, 1000, 20], [0, 3000, 42]]);
    expect(faults).toEqual([]);
  });

  it('is read in its long form', () => {
    const text = '{"time":"2026-03-01T00:00:00Z","channel":"inlet","value":20}\n{"time":"2026-03-01T00:00:01Z","channel":"flow","value":"41.5"}\n';
    const zero = Date.UTC(2026, 2, 1);
    expect(rowsOf(text, both).readings).toEqual([[1, zero, 20], [0, zero + 1000, 41.5]]);
  });

  it('counts what is no object, no number, no time', () => {
    const text = ['{"time":1,"flow":1}', '{"time":2,', '[1,2]', '7', '{"time":3,"flow":true}', '{"time":4,"flow":""}', '{"time":"soon","flow":5}', '{"time":6,"flow":6}'];
    const { readings, faults } = rowsOf(text.join('\n'), both);
    expect(readings).toEqual([[0, 1000, 1], [0, 6000, 6]]);
    expect(faults).toEqual(['bad-json', 'bad-json', 'bad-json', 'not-a-number', 'not-a-number', 'bad-time']);
  });

  it('knows the words for no number where they stand as text', () => {
    expect(rowsOf('{"time":1,"flow":"NaN"}\n{"time":2,"flow":"inf"}\n', both).readings.map(([, , value]) => value)).toEqual([NaN, Infinity]);
  });

  it('is spaced by every where it has no times', () => {
    expect(rowsOf('{"flow":41}\n{"flow":null}\n{"flow":43}\n', both).readings).toEqual([[0, 0, 41], [0, 200, 43]]);
  });

  it('takes no key of the language for a channel', () => {
    const { readings, faults } = rowsOf('{"time":1,"__proto__":5,"constructor":6,"flow":7}\n', wantedChannels('flow', 'toString'));
    expect(readings).toEqual([[0, 1000, 7]]);
    expect(faults).toEqual([]);
  });
});
