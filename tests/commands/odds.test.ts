import { afterEach, beforeEach, describe, expect, it, vi } from 'vitest';
import { run } from '../../src/commands/odds.js';
import { UserError } from '../../src/text/errors.js';
import { close, reference, rows } from '../stats/fixture.js';

let out = '';
let err = '';
beforeEach(() => {
  out = '';
  err = '';
  vi.spyOn(process.stdout, 'write').mockImplementation((text) => ((out += String(text)), true));
  vi.spyOn(process.stderr, 'write').mockImplementation((text) => ((err += String(text)), true));
});
afterEach(() => {
  vi.restoreAllMocks();
  vi.unstubAllEnvs();
});

async function json(line: string): Promise<Record<string, number | null>> {
  out = '';
  expect(await run([...line.split(' '), '--json'])).toBe(0);
  expect(err).toBe('');
  expect(out.endsWith('\n') && out.indexOf('\n') === out.length - 1).toBe(true);
  return JSON.parse(out) as Record<string, number | null>;
}

interface Reference {
  cdf: { z: number; cdf: number; sf: number; two_sided_p: number }[];
  cases: { what: string; p?: number; a?: number; b?: number; mean: number; sd: number; expected: number | [number, number] }[];
}
const known = reference('normal.json') as Reference;

describe('odds --json', () => {
  it('below, above and beyond against tests/reference/normal.json', async () => {
    for (const { z, cdf, sf, two_sided_p } of known.cdf) {
      close((await json(`below ${z}`))['probability']!, cdf, 1e-14, z);
      close((await json(`above ${z}`))['probability']!, sf, 1e-14, z);
      close((await json(`beyond ${Math.abs(z)}`))['probability']!, two_sided_p, 1e-14, z);
    }
  });
  it('intervals and bands in units against tests/reference/normal.json', async () => {
    for (const { p, a, b, mean, sd, expected } of known.cases) {
      if (typeof expected === 'number') close((await json(`between ${a} ${b} --mean ${mean} --sd ${sd}`))['probability']!, expected, 1e-13, [a, b]);
      else {
        const { low, high } = await json(`band ${p} --mean ${mean} --sd ${sd}`);
        close(low!, expected[0], 1e-14, p);
        close(high!, expected[1], 1e-14, p);
      }
    }
  });
  it('keeps the relative precision of tiny intervals (tests/stats/fixtures/normal.json)', async () => {
    for (const [a, b, p] of rows('normal.json', 'between')) {
      const { probability, oneIn } = await json(`between ${a} ${b}`);
      close(probability!, p!, 1e-14, [a, b]);
      close(oneIn!, 1 / p!, 1e-14, [a, b]);
    }
  });
  it('counts K in sigmas, or as a distance where --mean or --sd is given', async () => {
    close((await json('beyond 3'))['oneIn']!, 370.3983473449564, 1e-13, 'mpmath: 1 / erfc(3 / sqrt 2)');
    expect(await json('beyond 6 --mean -40 --sd 2')).toEqual(await json('beyond 3'));
    expect(await json('beyond 3 --mean 40')).toEqual(await json('beyond 3'));
  });
  it('takes negative and tiny numbers wherever a number may stand', async () => {
    expect(await json('below -3 --mean -4')).toEqual(await json('below 1'));
    expect(await json('between -1.5 2 --mean -.5 --sd 1e0')).toEqual(await json('between -1 2.5'));
    close((await json('band 1e-300'))['high']!, 1.2533141373155003e-300, 1e-15, 'p sqrt(pi / 2)');
    expect((await json('below -1e-300'))['probability']).toBe(0.5);
    close((await json('band 0.9999999999999999'))['high']!, 8.292361075813595, 1e-14, 'mpmath, for the double 1 - 2^-53');
  });
  it('says null where 1/p is no double', async () => {
    expect(await json('above 50')).toEqual({ probability: 0, oneIn: null });
    expect((await json('between -40 -38'))['oneIn']).toBeNull();
    expect(await json('between 1 1')).toEqual({ probability: 0, oneIn: null });
  });
});

describe('wrong use is a sentence with a mend', () => {
  it.each([
    ['band 0', /above 0 and below 1/, /odds band 0.95/],
    ['band 1', /above 0 and below 1/, /odds band 0.95/],
    ['band 95', /95 is not/, /odds band 0.95/],
    ['band -0.5', /-0.5 is not/, /odds band/],
    ['below x', /X is not a number: 'x'/, /-1.5/],
    ['below 1,5', /not a number/, /Write a point: 1.5/],
    ['below 0x10', /not a number/, /Write/],
    ['below 1e999', /too large/, /1.8e308/],
    ['between 2 1', /interval is empty/, /odds between 1 2/],
    ['between 2', /takes two numbers, not 1/, /odds between A B/],
    ['above 1 2', /takes one number, not 2/, /odds above X/],
    ['beyond -2', /cannot be negative/, /odds beyond 2/],
    ['belo 1', /does not know 'belo'/, /Did you mean 'below'/],
    ['toString 1', /does not know/, /below, above/],
    ['below 1 --sd 0', /--sd must be above 0/, /spread/],
    ['below 1 --sd -2', /--sd must be above 0/, /spread/],
    ['below 1 --mean nan', /--mean is not a number/, /Write/],
  ])('odds %s', async (line, what, mend) => {
    const error = await run(line.split(' ')).catch((caught: unknown) => caught);
    expect(error).toBeInstanceOf(UserError);
    expect((error as UserError).what).toMatch(what);
    expect((error as UserError).mend).toMatch(mend);
    expect(out).toBe('');
  });
  it.each(['', 'below 1 --foo', 'below 1 --sd'])('odds %s: exit status 2', async (line) => {
    expect(await run(line === '' ? [] : line.split(' '))).toBe(2);
    expect(err).toMatch(/kilter odds --help/);
  });
});

describe('odds for people', () => {
  it.each([
    ['beyond 3', '1 in 370 readings lies farther than 3 sigma from the mean, above or below (0.27 %).'],
    ['between 40.5 42 --mean 41.2 --sd 0.31', '98.3 % of readings lie between 40.5 and 42; 1 in 59 does not.'],
    ['above -5', '99.999971 % of readings lie above -5 sigma; 1 in 3 490 000 does not.'],
    ['below -6.2', '1 in 3.5e9 readings lies below -6.2 sigma.'],
    ['above 45', '1 in 1e442 readings lies above 45 sigma.'],
    ['below 40', 'All readings lie below 40 sigma.'],
    ['between 3 3', 'No reading lies between 3 and 3 sigma: the interval has no width.'],
    ['band 0.95 --mean 7.25 --sd 0.04', '95 % of readings lie between 7.17160 and 7.32840.'],
  ])('odds %s', async (line, sentence) => {
    expect(await run(line.split(' '))).toBe(0);
    expect(out.split('\n')[0]).toBe(sentence);
  });
  it('says how often that is at ten readings a second', async () => {
    await run(['beyond', '3']);
    expect(out).toContain('At 10 readings a second that is one every 37 s.');
  });
  it.each([
    [{ LC_ALL: 'C', LC_CTYPE: 'C.UTF-8', LANG: 'C.UTF-8' }, false],
    [{ LC_ALL: '', LC_CTYPE: 'C.UTF-8', LANG: 'C' }, true],
    [{ LC_ALL: '', LC_CTYPE: '', LANG: 'en_GB.utf8' }, true],
    [{ LC_ALL: '', LC_CTYPE: '', LANG: '' }, false],
  ])('draws by the locale: %o', async (environment, utf8) => {
    for (const [name, value] of Object.entries(environment)) vi.stubEnv(name, value);
    await run(['band', '0.9']);
    expect(/[^\n -~]/.test(out)).toBe(!utf8 ? false : true);
    out = '';
    await run(['band', '0.9', '--ascii']);
    expect(out).toMatch(/^[\n -~]*$/);
  });
});
