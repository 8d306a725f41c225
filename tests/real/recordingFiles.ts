import { mkdtempSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterAll } from 'vitest';
import { recordingSource } from '../../adapters/recording/source.js';
import { RecordingSink } from '../adapters/recordingSink.js';
import { wantedChannels } from '../adapters/recordingRows.js';

const folders: string[] = [];

afterAll(() => folders.forEach((folder) => rmSync(folder, { recursive: true, force: true })));

/** A fresh path with these bytes, gone after the tests of the file that asked for it. */
export function fileOf(bytes: string | Buffer, name = 'run.csv'): string {
  const folder = mkdtempSync(join(tmpdir(), 'kilter-recording-'));
  folders.push(folder);
  const path = join(folder, name);
  writeFileSync(path, bytes);
  return path;
}

/** `time,flow` with rows from <= k < to: value k at k seconds. */
export const rows = (from: number, to: number): string => Array.from({ length: to - from }, (_, i) => `${from + i},${from + i}\n`).join('');

/** Everything that a recording gives to a sink. */
export async function readAll(path: string, ...names: readonly string[]): Promise<RecordingSink> {
  const sink = new RecordingSink();
  const source = recordingSource('old', { path }, wantedChannels(...(names.length > 0 ? names : ['flow'])));
  source.start(sink);
  await source.ended;
  await source.stop();
  return sink;
}

export const lastWords = (sink: RecordingSink): string => sink.phases.at(-1)?.sentence ?? '';
