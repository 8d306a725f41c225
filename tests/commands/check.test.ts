import { describe, expect, it } from 'vitest';
import * as check from '../../src/commands/check.js';
import { GOOD, standFile } from '../stand/files.js';
import { captured } from './captured.js';

describe('kilter check', () => {
  it('prints the watch on each channel and its price, status 0', async () => {
    const { status, out } = await captured(check, [standFile(GOOD)]);
    expect(status).toBe(0);
    expect(out).toContain('Bench: 2 channels from 2 sources.');
    expect(out).toMatch(/band +given: centre 41\.20 L\/min, sigma 0\.31 L\/min, limits 40\.27 to 42\.13 L\/min \(3 sigma\)/);
    expect(out).toMatch(/band +learned from the first 500 readings \(8 min 20 s\)/);
    expect(out).toMatch(/one false alarm in 92 readings, every 1 min 32 s/);
  });

  it('prints every fault with line and column, status 1', async () => {
    const file = standFile(GOOD.replace('    unit: L/min', '    units: L/min').replace('every: 100 ms', 'every: 100'));
    const { status, out } = await captured(check, [file]);
    expect(status).toBe(1);
    expect(out).toContain(`${file}:16:5: There is no key 'units' in channels.flow. Did you mean 'unit'?`);
    expect(out).toMatch(/2 faults\.\n$/);
  });

  it('gives one JSON object with --json', async () => {
    const fine = await captured(check, [standFile(GOOD), '--json']);
    expect(JSON.parse(fine.out)).toMatchObject({ ok: true, faults: [], channels: [{ channel: 'flow', band: { low: 41.2 - 3 * 0.31 } }, { channel: 'bearing' }] });
    const bad = await captured(check, [standFile(GOOD.replace('every: 1 s', 'every: x')), '--json']);
    expect(JSON.parse(bad.out)).toMatchObject({ ok: false, faults: [{ line: 27, column: 12 }] });
  });

  it('says in a sentence that limits from a budget are not there yet, status 1', async () => {
    const { status, out } = await captured(check, [standFile(GOOD.replace('textbook', 'budget'))]);
    expect(status).toBe(1);
    expect(out).toMatch(/budget are not part of this version.*limits: textbook/);
  });

  it('leaves wrong use to the one status for it', async () => {
    expect((await captured(check, [])).status).toBe(2);
    expect((await captured(check, ['--help'])).status).toBe(0);
    await expect(captured(check, ['/nonexistent.yaml'])).rejects.toThrow(/no file/);
  });
});
