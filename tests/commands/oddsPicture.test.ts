import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { oddsPicture } from '../../src/commands/oddsPicture.js';

const STANDARD = { mean: 0, sd: 1 };
const asked = (line: string): number => Array.from(line).filter((c) => '▁▂▃▄▅▆▇█'.includes(c)).length;

describe('the picture of a probability', () => {
  it('shades the part asked for and no other', () => {
    const picture = oddsPicture({ from: 0, to: Infinity, outside: false }, STANDARD, true);
    const bottom = picture[5]!;
    expect(asked(bottom.slice(0, 38))).toBe(0); // the mean is in column 38
    expect(bottom.slice(0, 38)).toContain('░░░');
    expect(bottom.slice(38)).toMatch(/^[▁▂▃▄▅▆▇█]+$/);
  });
  it('is highest at the mean, and the cumulative curve rises from 0 to 100 %', () => {
    const picture = oddsPicture({ from: -1, to: 1, outside: false }, STANDARD, true);
    expect(picture[0]![38]).toBe('█');
    const curve = picture.slice(7, 11).reverse();
    expect(curve[0]).toMatch(/^ {2}0 % ▁/);
    expect(curve[3]).toMatch(/^100 % .*▔$/);
    const heights = Array.from({ length: 65 }, (_, i) => curve.findIndex((line) => '▂━▀▁─▔'.includes(line[6 + i] ?? ' ')));
    expect(heights.slice(30)).toEqual([...heights.slice(30)].sort((a, b) => a - b));
  });
  it('marks tails that are too thin to be seen, parts narrower than a column, and what lies outside', () => {
    const ruler = (from: number, to: number, outside = false): string => oddsPicture({ from, to, outside }, STANDARD, true)[6]!;
    expect(ruler(-3, 3, true)).toMatch(/^ {6}◀━+ {47,}━+▶$/);
    expect(ruler(1, 1.0001)).toBe(' '.repeat(6 + 40) + '━');
    expect(ruler(1.01, 1.02)).toBe(' '.repeat(6 + 40) + '▲');
    expect(ruler(45, Infinity).trim()).toBe('▶');
    expect(ruler(-40, -38).trim()).toBe('◀');
  });
  it('widens its axis until the ends of the part are on it', () => {
    expect(oddsPicture({ from: -6, to: 6, outside: false }, STANDARD, true).at(-1)).toMatch(/-6 sd .*\+6 sd/);
    expect(oddsPicture({ from: -3, to: 3, outside: false }, STANDARD, true).at(-1)).toMatch(/-4 sd .*\+4 sd/);
  });
  it('labels the axis in units and in standard deviations', () => {
    const [units, sigmas] = oddsPicture({ from: 40, to: 42, outside: false }, { mean: 41.2, sd: 0.5 }, true).slice(-2);
    expect(units).toMatch(/39\.20 +39\.70 +40\.20 +40\.70 +41\.20 +41\.70 +42\.20 +42\.70 +43\.20/);
    expect(sigmas).toMatch(/-4 sd +-3 sd .* mean .*\+3 sd +\+4 sd/);
  });
  it('fits into 80 columns and 16 lines whatever is asked, and is plain ASCII where it must be', () => {
    const any = fc.double({ min: -1e6, max: 1e6, noNaN: true });
    fc.assert(
      fc.property(any, fc.double({ min: 1e-9, max: 1e9, noNaN: true }), any, any, fc.boolean(), fc.boolean(), (mean, sd, a, b, outside, utf8) => {
        const picture = oddsPicture({ from: Math.min(a, b), to: Math.max(a, b), outside }, { mean, sd }, utf8);
        expect(picture.length).toBeLessThanOrEqual(16);
        for (const line of picture) {
          expect(line.length).toBeLessThanOrEqual(79);
          expect(line).toMatch(utf8 ? /^[ -~▀-█░▔▲◀▶─━┴]*$/ : /^[ -~]*$/);
        }
      }),
      { seed: 1 },
    );
  });
});
