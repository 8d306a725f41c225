import { appendFileSync, rmSync } from 'node:fs';
import { dirname } from 'node:path';
import { gzipSync } from 'node:zlib';
import { recordingSource } from '../../adapters/recording/source.js';
import { describeSource, valueOf } from '../adapters/source.contract.js';
import { wantedChannels } from '../adapters/recordingRows.js';
import { fileOf } from './recordingFiles.js';

const FORMS: readonly [name: string, head: string, row: (k: number) => string, garbage: (text: string) => string][] = [
  ['CSV', 'time,flow\n', (k) => `${k},${valueOf(k)}\n`, (text) => `7,${text}\n`],
  ['JSON Lines', '', (k) => `${JSON.stringify({ time: k, flow: valueOf(k) })}\n`, (text) => `{${text}\n`],
];

for (const [form, head, row, garbage] of FORMS)
  for (const pack of [null, gzipSync])
    describeSource(
      `recording (${form}${pack ? ', gzip' : ''})`,
      () => {
        const put = (bytes: string): void => appendFileSync(path, pack ? pack(bytes) : bytes); // each append a gzip member of its own
        const path = fileOf('');
        put(head);
        return Promise.resolve({
          source: recordingSource('old', { path }, wantedChannels('flow')),
          feed: (from: number, to: number) => {
            put(Array.from({ length: to - from }, (_, i) => row(from + i)).join(''));
            return Promise.resolve();
          },
          garble: (text: string) => {
            put(garbage(text));
            return Promise.resolve();
          },
          finish: () => Promise.resolve(),
          dispose: () => {
            rmSync(dirname(path), { recursive: true, force: true });
            return Promise.resolve();
          },
        });
      },
      { prepared: true, garbles: true, ends: true },
    );
