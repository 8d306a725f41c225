import { describe, expect, it } from 'vitest';
import { LineFeed } from '../../adapters/decoding/lineFeed.js';
import type { LineFormat } from '../../adapters/options.js';
import type { Fault, Sink, Wanted } from '../../adapters/source.js';

const MAX_LINE = 48;
const FIELDS = ['T', 'RH', 'P'];

/** The strict grammar once more, as an expression, and Number for the value: what no reading may differ from. */
const NUMBER = /^[ \t]*([+-]?(?:\d+\.?\d*|\.\d+)(?:[eE][+-]?\d+)?)[ \t]*$/;
const WORD = /^[ \t]*([+-]?)(nan|inf|infinity)[ \t]*$/i;

function strict(text: string): number | null {
  const word = WORD.exec(text);
  if (word) return word[2]!.toLowerCase() === 'nan' ? NaN : word[1] === '-' ? -Infinity : Infinity;
  const digits = NUMBER.exec(text)?.[1];
  if (digits === undefined) return null;
  const value = Number(digits);
  if (value > 9.909e37 && value < 9.911e37) return NaN;
  return Math.abs(value) < 9.8999e37 ? value : value * Infinity;
}

/** A number and a unit: it begins with no digit, sign or point, holds no mark, and makes no hexadecimal number. */
const UNITED = /^([+-]?(?:\d+\.?\d*|\.\d+)(?:[eE][+-]?\d+|(?![eE][+-]?\d)))(?![xX][0-9a-fA-F])[^0-9+\-.=:][^=:]*$/;
const DECIMALS = /^,[0-9][^ \t,;=:]*(?:$|[,;]|[ \t]+(?:$|[^ \t=:]))/;
const PAIR = /[ \t,;]*([^ \t,;=:]*)[ \t]*(?:[=:]([ \t]*)([^ \t,;]*))?/y;

function pairs(line: string): Reading[] {
  const found = new Map<number, number | null>();
  PAIR.lastIndex = 0;
  while (PAIR.lastIndex < line.length) {
    const [, name, blanks, glued] = PAIR.exec(line)!;
    if (glued === undefined) continue;
    const bare = blanks !== '' && /[=:]/.test(glued); // `T= RH=40`: T has no number
    if (bare) PAIR.lastIndex -= glued.length;
    const token = bare ? '' : glued;
    const slot = FIELDS.indexOf(name!);
    if (slot < 0 || found.has(slot)) continue;
    const value = strict(token) ?? strict(UNITED.exec(token)?.[1] ?? '');
    found.set(slot, !bare && DECIMALS.test(line.slice(PAIR.lastIndex)) ? null : value);
  }
  return [...found].filter((entry): entry is Reading => entry[1] !== null);
}

type Reading = [slot: number, value: number];

const readings = (values: (number | null)[]): Reading[] =>
  values.flatMap((value, slot): Reading[] => (value === null ? [] : [[slot, value]]));

/** What one line gives to the three fields, by splitting and regular expressions. */
const REFERENCE: Record<LineFormat, (line: string) => Reading[]> = {
  number: (line) => readings([strict(line)]),
  csv: (line) => readings(FIELDS.map((_, i) => strict(line.split(',')[i] ?? ''))),
  pairs,
  json: (line) => {
    try {
      const document = JSON.parse(line) as unknown;
      if (typeof document !== 'object' || document === null) return [];
      const members = new Map(Object.entries(document) as [string, unknown][]);
      return readings(
        FIELDS.map((name) => {
          const value = members.get(name);
          if (Object.is(value, -0)) return -0;
          return typeof value === 'number' || typeof value === 'string' ? strict(String(value)) : null;
        }),
      );
    } catch {
      return [];
    }
  },
};

/** A small generator with a seed (mulberry32, public domain). */
function generator(seed: number): (below: number) => number {
  let state = seed;
  return (below) => {
    state = (state + 0x6d2b79f5) | 0;
    let t = Math.imul(state ^ (state >>> 15), 1 | state);
    t = (t + Math.imul(t ^ (t >>> 7), 61 | t)) ^ t;
    return Math.floor((((t ^ (t >>> 14)) >>> 0) / 4294967296) * below);
  };
}

const NASTY = Buffer.from('0123456789....--++eEeE,,;:==  \t\r\u0000\u001b[{}"\'xXnaifNAITRHP\\/_', 'latin1');

/** Lines as an instrument sends them, and as a bad line, a wrong rate or an attacker makes of them. */
function* lines(format: LineFormat, count: number, seed: number): Generator<Buffer> {
  const random = generator(seed);
  const value = (): string => {
    switch (random(12)) {
      case 0:
        return ['nan', 'INF', '-inf', '9.91E37', '-9.9E+37', '', ' ', '0x1F', '1e400', '1,5', '-0', '+.5e-3'][random(12)]!;
      case 1:
        return `${random(1e9)}${random(1e9)}.${random(1e9)}e${random(80) - 40}`;
      case 2:
        return ((random(2e9) - 1e9) / 10 ** random(12)).toExponential();
      default:
        return ((random(2e6) - 1e6) / 10 ** random(6)).toFixed(random(7));
    }
  };
  const unit = (): string => ['', '', 'C', '%', ' degC', 'm/s2', '°C'][random(7)]!;
  const between = (): string => [' ', ',', ';', ', ', '; '][random(5)]!;
  const line: Record<LineFormat, () => string> = {
    number: value,
    csv: () => `${value()},${value()},${value()}`,
    pairs: () => `T=${value()}${unit()}${between()}RH${[':', '=', ' = '][random(3)]!}${value()}${unit()}${between()}P=${value()}`,
    json: () => `{"T":${value() || 'null'},"RH":"${value()}","P":${random(100)}}`,
  };
  for (let i = 0; i < count; i++) {
    const kind = random(20);
    let bytes = Buffer.from(line[format]());
    if (kind === 0) bytes = Buffer.from(Array.from({ length: random(60) }, () => random(256)));
    else if (kind < 8)
      for (let strokes = 1 + random(3); strokes > 0; strokes--) {
        const at = random(bytes.length + 1);
        const put = random(4) === 0 ? random(256) : NASTY[random(NASTY.length)]!;
        bytes = Buffer.concat([bytes.subarray(0, at), Buffer.from(random(3) === 0 ? [] : [put]), bytes.subarray(at + random(2))]);
      }
    yield bytes;
    yield Buffer.from(['\n', '\r', '\r\n'][random(3)]!);
  }
}

class CountingSink implements Sink {
  readonly got: Reading[] = [];
  readonly faults = new Map<Fault, number>();
  reading(slot: number, _time: number, value: number): void {
    this.got.push([slot, value]);
  }
  fault(fault: Fault): void {
    this.faults.set(fault, (this.faults.get(fault) ?? 0) + 1);
  }
  stale(): void {
    throw new Error('Lines are never stale.');
  }
  phase(): void {
    throw new Error('A feed has no phases.');
  }
  durable = (): Promise<void> => Promise.resolve();
  pressure = (): null => null;
  now = (): number => 0;
}

function expected(stream: Buffer, format: LineFormat): Reading[] {
  const found: Reading[] = [];
  const utf8 = new TextDecoder('utf-8', { fatal: true, ignoreBOM: true });
  for (const line of stream.toString('latin1').split(/[\r\n]/)) {
    if (line === '' || line.length > MAX_LINE || line.includes('\0')) continue;
    let text: string;
    try {
      text = utf8.decode(Buffer.from(line, 'latin1'));
    } catch {
      continue;
    }
    found.push(...REFERENCE[format](text));
  }
  return found;
}

describe('random and mutated lines', () => {
  it.each([
    ['number', 700_000],
    ['csv', 150_000],
    ['pairs', 100_000],
    ['json', 50_000],
  ] as const)('of %s give what the strict grammar gives and nothing else (%d lines)', (format, count) => {
    const wanted = (format === 'number' ? [null] : FIELDS).map(
      (field, slot): Wanted => ({ slot, channel: `c${slot}`, field, topic: null, value: null, time: null, sequence: null, every: null }),
    );
    const feed = new LineFeed({ lines: format, columns: FIELDS, maxLine: MAX_LINE }, wanted);
    const sink = new CountingSink();
    const random = generator(99);
    feed.open(sink, false);
    let wrong = 0;
    let compared = 0;
    let batch: Buffer[] = [];
    const judge = (): void => {
      const stream = Buffer.concat(batch);
      batch = [];
      for (let at = 0; at < stream.length; ) {
        const next = Math.min(stream.length, at + 1 + random(300));
        feed.push(stream.subarray(at, next));
        at = next;
      }
      const reference = expected(stream, format);
      const got = sink.got.splice(0);
      compared += reference.length;
      if (got.length !== reference.length || got.some(([slot, value], i) => slot !== reference[i]![0] || !Object.is(value, reference[i]![1]))) {
        wrong++;
        if (wrong === 1) expect(got).toEqual(reference);
      }
    };
    for (const piece of lines(format, count, 5)) {
      batch.push(piece);
      if (batch.length === 2000) judge();
    }
    judge();
    expect(wrong).toBe(0);
    expect(compared).toBeGreaterThan(count / 2);
    expect([...sink.faults.keys()]).toEqual(expect.arrayContaining(['bad-bytes', format === 'json' ? 'bad-json' : 'not-a-number']));
  });
});
