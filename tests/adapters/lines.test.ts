import { describe, expect, it } from 'vitest';
import { compileDecoder } from '../../adapters/decoding/lineDecoder.js';
import { LineFeed } from '../../adapters/decoding/lineFeed.js';
import type { LineFormat } from '../../adapters/options.js';
import type { Wanted } from '../../adapters/source.js';
import { RecordingSink } from './recordingSink.js';

const want = (field: string | null, more: Partial<Wanted> = {}): Wanted => ({
  slot: 0, channel: 'flow', field, topic: null, value: null, time: null, sequence: null, every: null, ...more,
});

interface Answer {
  /** `place: value` of every number, and each fault. */
  readonly got: Record<number, number>;
  readonly faults: string[];
  readonly times: number[];
}

function decode(lines: LineFormat, columns: string[] | null, wanted: (Wanted | string)[], text: string): Answer {
  const list = wanted.map((field) => (typeof field === 'string' ? want(field) : field));
  const decoder = compileDecoder({ lines, columns, maxLine: 256 }, list);
  const answer: Answer = { got: {}, faults: [], times: [] };
  const bytes = Buffer.from(`9${text}9`); // neighbours that must not be looked at
  decoder.decode(
    bytes,
    1,
    bytes.length - 1,
    (place, value, time) => {
      answer.got[place] = value;
      answer.times.push(time);
    },
    (fault) => answer.faults.push(fault),
  );
  return answer;
}

describe('lines of one number', () => {
  const number = (text: string): Answer => decode('number', null, [want(null)], text);
  it('give it to every channel of the source', () =>
    expect(decode('number', null, [want(null), want(null)], ' 12.5 ').got).toEqual({ 0: 12.5, 1: 12.5 }));
  it('give no reading for a blank', () => expect(number('  ')).toEqual({ got: {}, faults: ['not-a-number'], times: [] }));
  it('give an off-scale reading for a word', () => expect(number('nan').got).toEqual({ 0: NaN }));
  it('have no fields', () => expect(() => decode('number', null, ['flow'], '')).toThrow(/one number each/));
});

describe('lines of csv', () => {
  const columns = ['flow', '-', 'inlet'];
  it.each([
    ['12.5,x,40', { 0: 12.5, 1: 40 }, []],
    [' 12.5 ,, 40\t', { 0: 12.5, 1: 40 }, []],
    ['12.5', { 0: 12.5 }, ['missing-field']],
    ['12.5,x', { 0: 12.5 }, ['missing-field']],
    ['12.5,x,', { 0: 12.5 }, ['not-a-number']],
    [',x,40', { 1: 40 }, ['not-a-number']],
    ['12.5,x,40,50,60', { 0: 12.5, 1: 40 }, []],
    ['oops,x,40', { 1: 40 }, ['not-a-number']],
    ['flow,heater,inlet', {}, []],
    ['"12.5",x,40', { 1: 40 }, ['not-a-number']],
  ])('%s', (text, got, faults) => expect(decode('csv', columns, ['flow', 'inlet'], text)).toMatchObject({ got, faults }));

  it('count a missing column for each channel that wants it', () =>
    expect(decode('csv', ['a', 'b'], ['b', 'b', 'a'], '1').faults).toEqual(['missing-field', 'missing-field']));
  it('need no field where one column has a name', () => expect(decode('csv', ['-', 'x'], [want(null)], '1,2').got).toEqual({ 0: 2 }));
  it.each([
    [null, 'flow', /name its columns/],
    [['-'], 'flow', /name its columns/],
    [['flow', 'inlet'], 'flwo', /Did you mean 'flow'/],
    [['flow', 'inlet'], '-', /not named/],
  ])('are refused at the start with columns %j for a channel that wants %s', (names, field, message) =>
    expect(() => decode('csv', names, [field], '')).toThrow(message),
  );
  it('must be told which column', () => expect(() => decode('csv', ['a', 'b'], [want(null)], '')).toThrow(/which column/));
});

describe('lines of pairs', () => {
  it.each([
    ['T=21.45 RH=40.1', { 0: 21.45, 1: 40.1 }, []],
    ['T:21.45;RH:40.1', { 0: 21.45, 1: 40.1 }, []],
    ['T = 21.45 , RH = 40.1', { 0: 21.45, 1: 40.1 }, []],
    ['T=21.45C RH=40.1%', { 0: 21.45, 1: 40.1 }, []],
    ['T=21.45°C RH=40.1 %', { 0: 21.45, 1: 40.1 }, []],
    ['OK T=21.45 degC RH=40.1 done', { 0: 21.45, 1: 40.1 }, []],
    ['RH=40.1 T=-1.5e1K P=3', { 0: -15, 1: 40.1 }, []],
    ['T=nan RH=-inf', { 0: NaN, 1: -Infinity }, []],
    ['T=21.45', { 0: 21.45 }, ['missing-field']],
    ['T= RH=40.1', { 1: 40.1 }, ['not-a-number']],
    ['T=', {}, ['not-a-number', 'missing-field']],
    ['T==5 RH=40.1', { 1: 40.1 }, ['not-a-number']],
    ['T=21.4RH=40.1', {}, ['not-a-number', 'missing-field']],
    ['T=21.4.5 RH=0x1F', {}, ['not-a-number', 'not-a-number']],
    ['T=12:30 RH=2-3', {}, ['not-a-number', 'not-a-number']],
    ['T=21,45 RH=40,1', {}, ['not-a-number', 'not-a-number']],
    ['T=1 T=2 RH=3', { 0: 1, 1: 3 }, []],
    ['t=1 RH=3', { 1: 3 }, ['missing-field']],
    ['XT=1 RHX=3', {}, ['missing-field', 'missing-field']],
  ])('%s', (text, got, faults) => expect(decode('pairs', null, ['T', 'RH'], text)).toMatchObject({ got, faults }));

  it('may have numbers for names, parted by commas', () => expect(decode('pairs', null, ['1', '2'], '1=21,2=40').got).toEqual({ 0: 21, 1: 40 }));
  it('must be told which pair', () => expect(() => decode('pairs', null, [want(null)], '')).toThrow(/which of the line's pairs/));
});

describe('lines of JSON', () => {
  const json = (wanted: (Wanted | string)[], text: string): Answer => decode('json', null, wanted, text);

  it.each([
    ['{"t":21.5,"a":{"b":[1,2]},"x/y":3}', ['t', '/a/b/1', 'x/y'], { 0: 21.5, 1: 2, 2: 3 }, []],
    ['{"t":"21.5"}', ['t'], { 0: 21.5 }, []],
    ['{"t":null}', ['t'], {}, ['not-a-number']],
    ['{"t":""}', ['t'], {}, ['not-a-number']],
    ['{"t":true}', ['t'], {}, ['not-a-number']],
    ['{}', ['t', 'constructor'], {}, ['missing-field', 'missing-field']],
    ['{"t":1', ['t', 'u'], {}, ['bad-json']],
    ['{"t":NaN}', ['t'], {}, ['bad-json']],
    ['{"t":1}{"t":2}', ['t'], {}, ['bad-json']],
    ['{"t":1e999}', ['t'], { 0: Infinity }, []],
    ['null', ['t'], {}, ['missing-field']],
  ])('%s', (text, wanted, got, faults) => expect(json(wanted, text)).toMatchObject({ got, faults }));

  it('may be the number itself', () => expect(json([want(null)], '21.5').got).toEqual({ 0: 21.5 }));
  it('take a value by pointer before a field', () => expect(json([want('t', { value: '/u' })], '{"t":1,"u":2}').got).toEqual({ 0: 2 }));
  it('take the time of the device', () =>
    expect(json([want('t', { time: '/at' })], '{"t":1,"at":"2026-03-01T00:00:00Z"}').times).toEqual([Date.UTC(2026, 2, 1)]));
  it.each(['{"t":1}', '{"t":1,"at":"noon"}', '{"t":1,"at":null}', '{"t":1,"at":[1]}'])('give no reading whose time is wrong: %s', (text) =>
    expect(json([want('t', { time: '/at' })], text)).toEqual({ got: {}, faults: ['bad-time'], times: [] }));
  it('survive deep nesting', () => expect(json(['t'], '['.repeat(60_000)).faults).toEqual(['bad-json']));
});

describe('a feed of lines', () => {
  it('gives readings the time of arrival of their chunk, and the slots of their channels', () => {
    const sink = new RecordingSink();
    const feed = new LineFeed({ lines: 'csv', columns: ['a', 'b'], maxLine: 64 }, [want('b', { slot: 7 }), want('a', { slot: 3 })]);
    feed.open(sink, false);
    const from = sink.now();
    feed.push(Buffer.from('1,2\n3,4\n5,'));
    feed.push(Buffer.from('6'));
    feed.end();
    expect([sink.values(3), sink.values(7)]).toEqual([[1, 3, 5], [2, 4, 6]]);
    expect(sink.readings.every(({ time }) => time >= from && time <= sink.now())).toBe(true);
  });

  it('hands on a short sample of what it refuses', () => {
    const sink = new RecordingSink();
    const feed = new LineFeed({ lines: 'number', columns: null, maxLine: 4000 }, [want(null)]);
    feed.open(sink, false);
    feed.push(Buffer.from(`${'x'.repeat(3000)}\n`));
    expect(sink.faults).toEqual([{ fault: 'not-a-number', sample: 'x'.repeat(120) }]);
  });

  it('is silent once closed', () => {
    const sink = new RecordingSink();
    const feed = new LineFeed({ lines: 'number', columns: null, maxLine: 64 }, [want(null)]);
    feed.open(sink, false);
    feed.close();
    sink.close();
    feed.push(Buffer.from('1\n2\n'));
    feed.end();
    expect([sink.late, sink.readings]).toEqual([[], []]);
  });
});
