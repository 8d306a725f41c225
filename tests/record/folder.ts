import { mkdtempSync, readFileSync, rmSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { onTestFinished } from 'vitest';
import { AlarmLog } from '../../src/record/alarmLog.js';
import type { AlarmLogOptions } from '../../src/record/alarmLogOptions.js';

/** A folder of the test's own, gone after it. */
export function folder(): string {
  const path = mkdtempSync(join(tmpdir(), 'kilter-log-'));
  onTestFinished(() => rmSync(path, { recursive: true, force: true }));
  return path;
}

export interface Heard {
  readonly log: AlarmLog;
  readonly troubles: (string | null)[];
  readonly notes: string[];
}

/** A log whose words are heard. */
export function opened(file: string, options: Partial<AlarmLogOptions> = {}): Heard {
  const troubles: (string | null)[] = [];
  const notes: string[] = [];
  const log = AlarmLog.open(file, {
    maxBytes: 1 << 30,
    opening: { event: 'opened', time: '2026-01-01T00:00:00.000Z', stand: 'test' },
    onTrouble: (sentence) => troubles.push(sentence),
    onNote: (sentence) => notes.push(sentence),
    retryAfter: 20,
    ...options,
  });
  onTestFinished(() => log.close());
  return { log, troubles, notes };
}

export function ignore(): void {
  // for records whose durability a test does not ask for
}

/** The records of a file, each line parsed. */
export function records(file: string): Record<string, unknown>[] {
  return readFileSync(file, 'utf8')
    .split('\n')
    .filter((line) => line !== '')
    .map((line) => JSON.parse(line) as Record<string, unknown>);
}

/** Waits until a condition holds; throws with its source after `within` ms. */
export async function until(condition: () => boolean, within = 10_000): Promise<void> {
  const end = performance.now() + within;
  while (!condition()) {
    if (performance.now() > end) throw new Error(`Not in ${within} ms: ${condition.toString()}`);
    await new Promise((resolve) => setTimeout(resolve, 5));
  }
}
