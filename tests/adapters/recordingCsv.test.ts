import { describe, expect, it } from 'vitest';
import { LONGEST_LINE } from '../../adapters/recording/lineCarry.js';
import { rowsOf, valuesOf, wantedChannels } from './recordingRows.js';

const [flow, both] = [wantedChannels('flow'), wantedChannels('flow', 'inlet')];

describe('a CSV recording', () => {
  it('gives each channel its column, wherever that stands', () => {
    const { readings, faults } = rowsOf('note,inlet,time,flow\nx,20.5,1,41\ny,20.75,2,42\n', both);
    expect(readings).toEqual([[1, 1000, 20.5], [0, 1000, 41], [1, 2000, 20.75], [0, 2000, 42]]);
    expect(faults).toEqual([]);
  });

  it.each([
    ['LF', 'time,flow\n1,41.5\n2,42.5\n'],
    ['CRLF (RFC 4180, 2.1)', 'time,flow\r\n1,41.5\r\n2,42.5\r\n'],
    ['no line end after the last row (RFC 4180, 2.2)', 'time,flow\n1,41.5\n2,42.5'],
    ['CRLF, none after the last row', 'time,flow\r\n1,41.5\r\n2,42.5'],
    ['a byte order mark', '\ufefftime,flow\n1,41.5\n2,42.5\n'],
    ['empty lines', '\n\ntime,flow\n\n1,41.5\n\n\n2,42.5\n\n'],
    ['semicolons', 'time;flow\n1;41.5\n2;42.5\n'],
    ['tabs', 'time\tflow\n1\t41.5\n2\t42.5\n'],
    ['tabs and an unnamed first column', '\ttime\tflow\n0\t1\t41.5\n1\t2\t42.5\n'],
    ['blanks round names and numbers', ' time , flow \n 1 , 41.5 \n2,\t42.5\n'],
    ['all cells in quotes (RFC 4180, 2.5)', '"time","flow"\n"1","41.5"\n"2","42.5"\n'],
    ['a delimiter within quotes (2.6)', 'note,time,flow\n"a,b",1,41.5\n"c",2,42.5\n'],
    ['a quote within quotes (2.7)', 'note,time,flow\n"say ""on"", now",1,41.5\nc,2,42.5\n'],
    ['a line break within quotes (2.6)', 'note,time,flow\n"first\r\nsecond, 9,99\n",1,41.5\nc,2,42.5\n'],
    ['a quote in a cell that began without', 'note,time,flow\n5" pipe,1,41.5\n6" pipe,2,42.5\n'],
  ])('is read with %s', (_, text) => {
    const { readings, faults } = rowsOf(text, flow);
    expect(readings).toEqual([[0, 1000, 41.5], [0, 2000, 42.5]]);
    expect(faults).toEqual([]);
  });

  it('takes an empty cell, or one of blanks, for a missing reading', () => {
    const { readings, faults } = rowsOf('time,flow,inlet\n1,,20\n2,  ,21\n3,41,\n', both);
    expect(readings).toEqual([[1, 1000, 20], [1, 2000, 21], [0, 3000, 41]]);
    expect(faults).toEqual([]);
  });

  it('takes the words for no number as readings, and counts what is none', () => {
    const { readings, faults } = rowsOf('time,flow\n1,nan\n2,NaN\n3,-inf\n4,OVLD\n5,41,\n6,4 1\n7,0x29\n', flow);
    expect(readings.map(([, , value]) => value)).toEqual([NaN, NaN, -Infinity, 41]);
    expect(faults).toEqual(['not-a-number', 'not-a-number', 'not-a-number']);
  });

  it('counts rows that are too short, takes what they have, and leaves over what is too much', () => {
    const { readings, faults } = rowsOf('time,flow,inlet\n1,41\n2\n3,42,20,99,98\n', both);
    expect(readings).toEqual([[0, 1000, 41], [0, 3000, 42], [1, 3000, 20]]);
    expect(faults).toEqual(['missing-field', 'missing-field']);
  });

  it('never takes a cell of another row for a missing one', () => {
    expect(valuesOf('time,note,flow\n1,x,41\n2,y\n3,z,43\n')).toEqual([41, 43]);
  });

  it('loses only the row of a quote that nothing closes', () => {
    const rows = Array.from({ length: 500 }, (_, i) => `${i + 2},ok,${i}`);
    const { readings, faults } = rowsOf(`time,note,flow\n1,"open,41\n${rows.join('\n')}\n`, flow);
    expect(readings.map(([, , value]) => value)).toEqual(Array.from({ length: 500 }, (_, i) => i));
    expect(faults).toEqual(['missing-field']);
  });

  it('drops a line beyond 1 MiB, counts it once, and reads on', () => {
    const endless = `2,${'9'.repeat(LONGEST_LINE + 10)}`;
    const { readings, faults } = rowsOf(`time,flow\n1,41\n${endless}\n3,43\n`, flow, [5, 1 << 19, 1 << 20, (1 << 20) + 7]);
    expect(readings).toEqual([[0, 1000, 41], [0, 3000, 43]]);
    expect(faults).toEqual(['too-long']);
  });

  it('is read in its long form, a reading a row, in any order of the three columns', () => {
    const text = 'channel,value,time\nflow,41,1\ninlet,20,1\nother,7,1\nflow,,2\nflow,x,3\nflow,42,4\n';
    const { readings, faults, reader } = rowsOf(text, both);
    expect(readings).toEqual([[0, 1000, 41], [1, 1000, 20], [0, 4000, 42]]);
    expect(faults).toEqual(['not-a-number']);
    expect(reader.absent).toEqual([]);
  });

  it('gives one column to each of the channels that ask for it', () => {
    expect(rowsOf('time,flow\n1,41\n', wantedChannels(['fast', 'flow'], ['slow', 'flow'])).readings).toEqual([[0, 1000, 41], [1, 1000, 41]]);
  });

  it('gives a column to the channel of which it is the first name, not to one that would make do with it', () => {
    const channels = wantedChannels(['inlet', 't1'], ['outlet', 'inlet']); // the first is looked for as t1, else as inlet
    const { readings, reader } = rowsOf('time,inlet\n1,20\n', channels);
    expect(readings).toEqual([[1, 1000, 20]]);
    expect(reader.absent).toEqual([0]);
  });

  it('reads numbers as Number does, to the last bit', () => {
    const words = ['0.1', '-0', '1e-7', '4.35', '123456789.123456789', '9007199254740993', '5e-324', '9.8999e37', '.5', '5.', '+3'];
    expect(valuesOf(`flow\n${words.join('\n')}\n`)).toEqual(words.map(Number));
  });
});
