import fc from 'fast-check';
import { expect, it } from 'vitest';
import { dotColumn } from '../../src/screen/picture.js';
import { drawRoster } from '../../src/screen/roster.js';
import { Raster } from '../../src/screen/raster.js';
import { theme } from '../../src/screen/theme.js';
import { initialUi } from '../../src/screen/ui.js';
import { channel, inventedStand } from './inventedStand.js';

const SPANS = fc.constantFrom(60, 120, 300, 600, 1200, 2000);
const INDEX = fc.integer({ min: 2000, max: 2 ** 40 });

it('the newest reading stands at the right edge and the oldest at the left, at any index', () => {
  fc.assert(
    fc.property(SPANS, INDEX, fc.integer({ min: 60, max: 400 }), (span, newest, width) => {
      expect(dotColumn(newest, 0, span, 20, 20 + width)).toBe(20 + width);
      expect(dotColumn(newest, span - 1, span, 20, 20 + width)).toBeLessThanOrEqual(21);
      expect(dotColumn(newest, span - 1, span, 20, 20 + width)).toBeGreaterThanOrEqual(20);
    }),
    { seed: 20310510 },
  );
});

it('two readings keep their distance while the trend moves on', () => {
  fc.assert(
    fc.property(SPANS, INDEX, fc.nat(40), fc.nat(40), fc.nat(15), (span, newest, age, apart, later) => {
      fc.pre(age + apart + later < span); // both still shown
      const at = (index: number, ago: number): number => dotColumn(index, ago, span, 20, 140);
      expect(at(newest, age) - at(newest, age + apart)).toBe(at(newest + later, age + later) - at(newest + later, age + later + apart) || 0);
    }),
    { seed: 20310511 },
  );
});

it('the spark of a row moves by whole columns: none of them changes when a reading comes', () => {
  const width = 120;
  const spark = (index: number): string => {
    const c = channel(0, { readings: 2000 });
    const trend = c.trend.subarray(0, index + 1);
    const r = new Raster('braille');
    r.resize(width, 1);
    r.clear();
    drawRoster(r, theme(256), inventedStand({ channels: [{ ...c, trend, trendLength: index + 1, index }] }), initialUi(), 0, 1, 0);
    const row = Array.from({ length: width }, (_, x) => r.glyph(x)).join('').trimEnd();
    return row.slice(row.search(/[▁-█]/));
  };
  const before = spark(400); // an even index: its pair has one reading only
  expect(spark(401).slice(0, -1)).toBe(before.slice(0, -1));
  expect(spark(402).slice(0, -1)).toBe(spark(401).slice(1));
});
