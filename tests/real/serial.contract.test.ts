import { serialSource } from '../../adapters/serial/source.js';
import { describeSource, valueOf } from '../adapters/source.contract.js';
import { PtyPair } from './ptyPair.js';
import { onPort, wantedNumber } from './serialOptions.js';

const lines = (from: number, to: number): string =>
  Array.from({ length: to - from }, (_, i) => `${valueOf(from + i)}\r\n`).join('');

describeSource(
  'serial',
  async () => {
    const pair = new PtyPair();
    await pair.appear();
    return {
      source: serialSource('logger', onPort(pair.path), wantedNumber),
      feed: (from, to) => pair.send(`\n${lines(from, to)}`), // the first line end after an opening ends the dropped line
      garble: (text) => pair.send(`${text}\n`),
      break: () => pair.vanish(),
      restore: () => pair.appear(),
      dispose: () => pair.dispose(),
    };
  },
  { garbles: true, breaks: true },
);
