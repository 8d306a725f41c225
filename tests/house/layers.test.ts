import { ESLint } from 'eslint';
import { join } from 'node:path';
import { beforeAll, describe, expect, it } from 'vitest';

// The import directions of the house are held by lint. Here lint itself is put to the test: a planted breach must be found.
const root = join(import.meta.dirname, '..', '..');
let eslint: ESLint;

beforeAll(() => {
  eslint = new ESLint({
    cwd: root,
    overrideConfig: { languageOptions: { parserOptions: { projectService: false, project: false } } },
    ruleFilter: ({ ruleId }) => ruleId.startsWith('no-restricted'),
  });
});

async function complaints(path: string, code: string): Promise<string[]> {
  const [result] = await eslint.lintText(code, { filePath: join(root, path) });
  return result!.messages.map(({ ruleId, message }) => `${ruleId}: ${message}`);
}

describe('imports point one way', () => {
  it.each([
    ['src/stats/planted.ts', "import { Channel } from '../engine/channel.js'; export { Channel };"],
    ['src/stats/planted.ts', "import { readFileSync } from 'node:fs'; export { readFileSync };"],
    ['src/engine/planted.ts', "import { clean } from '../text/clean.js'; export { clean };"],
    ['src/engine/planted.ts', "import mean from 'simple-statistics'; export { mean };"],
    ['src/record/planted.ts', "import { loadStand } from '../stand/load.js'; export { loadStand };"],
    ['adapters/serial/planted.ts', "import { loadStand } from '../../src/stand/load.js'; export { loadStand };"],
    ['src/stand/planted.ts', "import { run } from '../commands/odds.js'; export { run };"],
    ['src/screen/planted.ts', "import { Runtime } from '../stand/runtime.js'; export { Runtime };"],
  ])('%s may not say %s', async (path, code) => {
    expect(await complaints(path, code)).not.toEqual([]);
  });

  it.each([
    ['src/engine/planted.ts', "import { cdf } from '../stats/normal.js'; export { cdf };"],
    ['adapters/serial/planted.ts', "import { clean } from '../../src/text/clean.js'; export { clean };"],
    ['src/stand/planted.ts', "import { AlarmLog } from '../record/alarmLog.js'; export { AlarmLog };"],
  ])('%s may say %s', async (path, code) => {
    expect(await complaints(path, code)).toEqual([]);
  });

  it.each(['export const t = Date.now();', 'export const r = Math.random();', 'export const p = performance.now();', 'setTimeout(() => 0, 1);'])(
    'the engine may not say %s',
    async (code) => {
      expect(await complaints('src/engine/planted.ts', code)).not.toEqual([]);
    },
  );
});
