import { readFileSync, writeFileSync } from 'node:fs';
import { join } from 'node:path';
import { describe, expect, it, vi } from 'vitest';
import { run } from '../../src/commands/verify.js';
import { rotatedFiles } from '../../src/record/logFiles.js';
import { UserError } from '../../src/text/errors.js';
import { folder, ignore, opened } from './folder.js';

async function verify(...args: string[]): Promise<{ status: number; output: string }> {
  let output = '';
  const out = vi.spyOn(process.stdout, 'write').mockImplementation((text) => {
    output += String(text);
    return true;
  });
  try {
    return { status: await run(args), output };
  } finally {
    out.mockRestore();
  }
}

/** A log of 20 alarms in several files. */
async function rotated(): Promise<string> {
  const file = join(folder(), 'alarms.log');
  const { log } = opened(file, { maxBytes: 1000 });
  for (let index = 0; index < 20; index++) log.append({ event: 'raised', index }, ignore);
  await log.close();
  return file;
}

describe('kilter verify', () => {
  it('finds the rotated files beside the log, says what holds and what was not checked', async () => {
    const file = await rotated();
    const { status, output } = await verify(file);
    expect(status).toBe(0);
    expect(output).toMatch(new RegExp(`^The chain holds: \\d+ lines in ${rotatedFiles(file).length + 1} files\\.\\nLast hash: [0-9a-f]{64}\\nNot checked: `));
  });

  it('takes all that a pattern such as alarms.log* names, in whatever order', async () => {
    const file = await rotated();
    writeFileSync(`${file}.torn-20260101T000000000Z`, 'x');
    const { status, output } = await verify(file, `${file}.ballast`, `${file}.torn-20260101T000000000Z`, ...rotatedFiles(file));
    expect({ status, output }).toEqual(await verify(file));
  });

  it('names the first line that does not hold, in the file where it stands', async () => {
    const file = await rotated();
    const second = rotatedFiles(file)[1]!;
    writeFileSync(second, readFileSync(second, 'utf8').replace(/"index":(\d+)/, '"index":99'));
    const { status, output } = await verify(file);
    expect(status).toBe(1);
    expect(output.startsWith(`${second}:3: the chain does not hold. `)).toBe(true);
    const json = await verify(file, '--json');
    expect(json.status).toBe(1);
    expect(JSON.parse(json.output)).toMatchObject({ holds: false, file: second, line: 3, checked: 'chain' });
  });

  it('with --json prints one object', async () => {
    const file = await rotated();
    const { status, output } = await verify('--json', file);
    expect(status).toBe(0);
    expect(output.trimEnd()).not.toContain('\n');
    expect(JSON.parse(output)).toMatchObject({ holds: true, files: rotatedFiles(file).length + 1, continues: null, checked: 'chain' });
  });

  it('a part of a log holds by itself, and says what it goes on from', async () => {
    const file = await rotated();
    const { status, output } = await verify(rotatedFiles(file)[1]!);
    expect(status).toBe(0);
    expect(output).toContain('It goes on from alarms.log.');
  });

  it('a file that is not there, a folder, no file at all: wrong use', async () => {
    const root = folder();
    await expect(verify(join(root, 'none'))).rejects.toThrow(UserError);
    await expect(verify(root)).rejects.toThrow(UserError);
    const err = vi.spyOn(process.stderr, 'write').mockReturnValue(true);
    expect((await verify()).status).toBe(2);
    err.mockRestore();
  });

  it('the help says what is not checked yet', async () => {
    const { status, output } = await verify('--help');
    expect(status).toBe(0);
    expect(output).toMatch(/recomputes from its own evidence is not checked yet/);
  });
});
