import { mkdtempSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';

const folder = mkdtempSync(join(tmpdir(), 'kilter-stand-'));
let count = 0;

/** A stand file with this text. */
export function standFile(text: string | Buffer): string {
  const file = join(folder, `stand-${++count}.yaml`);
  writeFileSync(file, text);
  return file;
}

/** A stand file without a fault; each test spoils a part of it. */
export const GOOD = `stand: Bench
watch:
  limits: textbook
  falseAlarms: 1 per day
sources:
  logger:
    serial: /dev/ttyS9
    lines: csv
    columns: [flow, "-", inlet]
  bus:
    mqtt: mqtt://127.0.0.1:1883
    user: {env: NAME}
channels:
  flow:
    from: logger/flow
    unit: L/min
    every: 100 ms
    range: [0, 60]
    tolerance: [38, 44]
    resolution: 0.01
    band: {centre: 41.2, sigma: 0.31}
    rules: [one-beyond-3, eight-one-side]
  bearing:
    from: bus
    topic: cell3/bearing
    value: /celsius
    every: 1 s
    band: learn 500
`;
