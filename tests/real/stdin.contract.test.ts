import { PassThrough } from 'node:stream';
import { stdinSource } from '../../adapters/stdin/source.js';
import { describeSource, valueOf } from '../adapters/source.contract.js';
import { wantedNumber } from './serialOptions.js';

describeSource(
  'standard input',
  () => {
    const stream = new PassThrough();
    const write = (text: string): Promise<void> => new Promise((resolve) => stream.write(text, () => resolve()));
    return Promise.resolve({
      source: stdinSource('pipe', { lines: 'number', columns: null, maxLine: 256 }, wantedNumber, stream),
      feed: async (from: number, to: number) => {
        for (let k = from; k < to; k++) await Promise.race([write(`${valueOf(k)}\n`), Promise.resolve()]);
      },
      garble: (text: string) => write(`${text}\n`),
      finish: () => Promise.resolve(void stream.end()),
      dispose: () => Promise.resolve(),
    });
  },
  { garbles: true, ends: true },
);
