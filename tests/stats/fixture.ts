import { readFileSync } from 'node:fs';
import { expect } from 'vitest';

/** Rows of numbers of one table of a fixture file; "Infinity" stands for the number. */
export function rows(file: string, table: string): number[][] {
  const tables = JSON.parse(readFileSync(new URL(`./fixtures/${file}`, import.meta.url), 'utf8')) as Record<string, { rows: (number | string)[][] }>;
  const found = tables[table]!.rows.map((row) => row.map(Number));
  expect(found.length).toBeGreaterThan(5);
  return found;
}

/** Parsed tests/reference/FILE. */
export function reference(file: string): unknown {
  return JSON.parse(readFileSync(new URL(`../reference/${file}`, import.meta.url), 'utf8'));
}

/** The value is the expected one to within the relative error; a zero must be zero. */
export function close(found: number, expected: number, relative: number, what: unknown): void {
  const error = found === expected ? 0 : Math.abs(found / expected - 1);
  expect(error, `${JSON.stringify(what)}: ${found} for ${expected}`).toBeLessThanOrEqual(relative);
}
