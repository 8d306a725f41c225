import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { readJsonNumber, readNumber, scanNumber } from '../../adapters/decoding/number.js';
import { follow, parsePointer } from '../../adapters/decoding/pointer.js';
import { parseTime } from '../../adapters/decoding/time.js';

const out = new Float64Array(1);

/** The value, or null where the text is no number. */
function number(text: string): number | null {
  const bytes = Buffer.from(`#${text}#`); // neighbours that must not be looked at
  return readNumber(bytes, 1, bytes.length - 1, out) ? out[0]! : null;
}

describe('a number', () => {
  it.each(['0', '-0', '+1', '1.', '.5', '-.5e3', '21.45', '1e5', '1E+05', '007', '12.50', '0e999', '5e-324', '9.8e37', '1e-400'])(
    'is read from %s as Number reads it',
    (text) => expect(number(text)).toBe(Number(text)),
  );

  // IEEE Std 488.2-1992 section 8.7: the response forms NR1, NR2 and NR3 (from memory).
  it.each([
    ['+00012', 12],
    ['-0.250', -0.25],
    ['+1.234560E-03', 0.00123456],
    ['-1.0E+02', -100],
  ])('is read from the IEEE 488.2 form %s', (text, value) => expect(number(text)).toBe(value));

  it.each([' 1', '1 ', '\t1 \t'])('may have blanks around it: %j', (text) => expect(number(text)).toBe(1));

  it.each(['', ' ', '\t', '.', '+', '-', 'e5', '.e5', '1e', '1e+', '1 2', '1,5', '--1', '+-1', '1.2.3', '0x10', '1_000', '1\u00a0', '\u00a01', '１', '12a', '1n', 'null', 'true', 'Infinit', 'infinite', 'nano', '1\r', 'NaN1'])(
    'is not %j',
    (text) => expect(number(text)).toBeNull(),
  );

  // SCPI-1999 volume 1 section 7.2.1: 9.9E37, -9.9E37 and 9.91E37 for the infinities and not-a-number (from memory).
  it.each([
    ['9.9E37', Infinity],
    ['+9.90000000E+37', Infinity],
    ['-9.9E37', -Infinity],
    ['9.91E37', NaN],
    ['9.910000E+37', NaN],
    [String(Math.fround(9.91e37)), NaN],
    [String(Math.fround(9.9e37)), Infinity],
    ['1e38', Infinity],
    ['-1e400', -Infinity],
    ['9.8E37', 9.8e37],
    ['nan', NaN],
    ['-NaN', NaN],
    ['inf', Infinity],
    ['+INF', Infinity],
    ['-Infinity', -Infinity],
  ])('is off-scale as %s: %d', (text, value) => expect(number(text)).toBe(value));

  const decimal = fc
    .tuple(fc.constantFrom('', '-', '+'), fc.stringMatching(/^[0-9]{0,25}$/), fc.stringMatching(/^(\.[0-9]{0,25})?$/), fc.stringMatching(/^([eE][+-]?[0-9]{1,2})?$/))
    .map((parts) => parts.join(''));

  it('is the double that Number gives, for every decimal', () => {
    fc.assert(
      fc.property(decimal, (text) => {
        const valid = /^[+-]?(\d+\.?\d*|\.\d+)([eE][+-]?\d+)?$/.test(text);
        const value = Number(text);
        const expected = Math.abs(value) < 9.89e37 ? value : undefined;
        if (!valid) expect(number(text)).toBeNull();
        else if (expected !== undefined) expect(number(text)).toBe(expected);
      }),
      { seed: 11, numRuns: 100_000 },
    );
  });

  it('is the double itself, for every double as JavaScript writes it', () => {
    fc.assert(
      fc.property(fc.double({ noNaN: true, min: -9e37, max: 9e37 }), fc.nat(12), (value, digits) => {
        expect(number(String(value))).toBe(Object.is(value, -0) ? 0 : value); // String(-0) is 0
        const rounded = value.toExponential(digits);
        expect(number(rounded)).toBe(Number(rounded));
      }),
      { seed: 12, numRuns: 50_000 },
    );
  });

  it('is scanned to its end and no further', () => {
    const end = (text: string): number => scanNumber(Buffer.from(text), 0, text.length, out);
    expect(['21.45degC', '5eV', '1e5x', '-', 'x', '1.5.2', '3e+'].map(end)).toEqual([5, 1, 3, 0, 0, 3, 1]);
  });

  it('in JSON is a number or a string that is one', () => {
    const json = (value: unknown): number | null => (readJsonNumber(value, out) ? out[0]! : null);
    expect([1.5, '1.5', ' 1.5 ', 9.91e37, '9.9E37', 'nan'].map(json)).toEqual([1.5, 1.5, 1.5, NaN, Infinity, NaN]);
    expect([null, true, '', ' ', [], [1], {}, undefined, '1,5', '1'.repeat(500)].map(json).every((value) => value === null)).toBe(true);
  });
});

describe('a JSON pointer', () => {
  // The table of RFC 6901 section 5.
  const document: unknown = JSON.parse(
    '{"foo":["bar","baz"],"":0,"a/b":1,"c%d":2,"e^f":3,"g|h":4,"i\\\\j":5,"k\\"l":6," ":7,"m~n":8}',
  );
  it.each([
    ['/foo', ['bar', 'baz']],
    ['/foo/0', 'bar'],
    ['/', 0],
    ['/a~1b', 1],
    ['/c%d', 2],
    ['/e^f', 3],
    ['/g|h', 4],
    ['/i\\j', 5],
    ['/k"l', 6],
    ['/ ', 7],
    ['/m~0n', 8],
  ])('leads with %s to what RFC 6901 says', (pointer, value) => expect(follow(document, parsePointer(pointer))).toEqual(value));

  it('leads to the whole document when it is empty', () => expect(follow(document, parsePointer(''))).toBe(document));

  it('unescapes ~01 to ~1, not to a slash', () => expect(parsePointer('/~01')).toEqual(['~1']));

  it.each(['foo', 'foo/0', '#/foo', '/~', '/~2', '/a~'])('is not %s', (text) => expect(() => parsePointer(text)).toThrow(/no JSON pointer/));

  it.each(['/foo/00', '/foo/-', '/foo/-1', '/foo/2', '/foo/length', '/foo/1e0', '/foo/0/0', '/foo/0/length', '/absent', '/constructor', '/__proto__', '/foo/map', '/toString/name'])(
    'leads nowhere with %s',
    (text) => expect(follow(document, parsePointer(text))).toBeUndefined(),
  );

  it('sees a member named __proto__ that the document itself has', () =>
    expect(follow(JSON.parse('{"__proto__":{"x":1}}'), parsePointer('/__proto__/x'))).toBe(1));
});

describe('a time', () => {
  const day = Date.UTC(2026, 2, 1);
  it.each([
    ['2026-03-01T08:15:30.250Z', day + 29_730_250],
    ['2026-03-01 08:15:30,25Z', day + 29_730_250],
    ['2026-03-01t08:15:30z', day + 29_730_000],
    ['2026-03-01T08:15Z', day + 29_700_000],
    ['2026-03-01T08:15:30', day + 29_730_000],
    ['2026-03-01', day],
    ['2026-03-01T09:15:30+01:00', day + 29_730_000],
    ['2026-03-01T02:45:30-0530', day + 29_730_000],
    ['2026-03-01T09:15:30+01', day + 29_730_000],
    ['2026-03-01T00:00:00.000001Z', day + 0.001],
    // RFC 3339 section 5.8, its examples
    ['1985-04-12T23:20:50.52Z', 482_196_050_520],
    ['1996-12-19T16:39:57-08:00', 851_042_397_000],
    ['1990-12-31T23:59:60Z', 662_688_000_000],
    ['1990-12-31T15:59:60-08:00', 662_688_000_000],
    ['2024-02-29T00:00:00Z', 1_709_164_800_000],
    ['0099-01-01T00:00:00Z', -59_042_995_200_000],
  ])('is read from %s', (text, time) => expect(parseTime(text)).toBeCloseTo(time, 6));

  it.each([
    [1_700_000_000, 1_700_000_000_000],
    [1_700_000_000.123, 1_700_000_000_123],
    ['1700000000.123456', 1_700_000_000_123.456],
    [1_700_000_000_123, 1_700_000_000_123],
    ['1.7e9', 1_700_000_000_000],
    [0, 0],
    ['0.1', 100],
    [-1, -1000],
    [99_999_999_999, 99_999_999_999_000],
    [100_000_000_000, 100_000_000_000],
  ])('is %s in seconds or milliseconds by its magnitude', (value, time) => expect(parseTime(value)).toBe(time));

  it.each([
    '', ' ', 'now', '2026-02-29', '2026-13-01', '2026-00-10', '2026-01-32', '2026-04-31', '1900-02-29', '2026-03-01T24:00:00Z', '2026-03-01T08:60Z', '2026-03-01T08:15:61Z',
    '2026-03-01T08:15:60Z', '2026-03-01T08Z', '2026-3-1', '20260301T081530Z', '2026-03-01T08:15:30+24:00', '2026-03-01T08:15:30.Z', '2026-03-01T08:15:30Z trailing', '01/03/2026', '1e15', '0x10', 'NaN', 'Infinity', NaN, Infinity, 1.7e15, 1.7e18,
  ])('is not %j', (value) => expect(parseTime(value)).toBeNaN());

  it('of every millisecond is read back as Date wrote it', () => {
    fc.assert(
      fc.property(fc.date({ min: new Date(0), max: new Date('9999-12-31T23:59:59.999Z'), noInvalidDate: true }), (date) => {
        expect(parseTime(date.toISOString())).toBe(date.getTime());
      }),
      { seed: 13, numRuns: 20_000 },
    );
  });
});
