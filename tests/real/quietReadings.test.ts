import { execFileSync } from 'node:child_process';
import { join } from 'node:path';
import { describe, expect, it } from 'vitest';
import { ZONE_RULES, type Rule } from '../../src/engine/rules.js';

const PROGRAM = join(import.meta.dirname, 'programs', 'quietReadings.mjs');
const bytes = (rules: readonly Rule[]): number => Number(execFileSync(process.execPath, [PROGRAM, ...rules], { encoding: 'utf8' }));

// On the built program, since a test runner's own wrapping of modules makes boxes.
describe('a quiet reading takes nothing from the heap', () => {
  it('through the zone rules and all health detectors, with mean and sd of the window', () => {
    expect(bytes(ZONE_RULES)).toBeLessThan(0.1);
  });

  it('through the supplementary rules and the prediction interval', () => {
    expect(bytes([...ZONE_RULES, 'nine-one-side', 'trend-of-6', 'alternating-14', 'inconsistent'])).toBeLessThan(0.1);
  });
});
