import { vi } from 'vitest';

/** Runs a verb in this process and keeps what it writes. */
export async function captured(verb: { run(args: readonly string[]): Promise<number> }, args: readonly string[]): Promise<{ status: number; out: string; err: string }> {
  let [out, err] = ['', ''];
  const stdout = vi.spyOn(process.stdout, 'write').mockImplementation((text) => ((out += String(text)), true));
  const stderr = vi.spyOn(process.stderr, 'write').mockImplementation((text) => ((err += String(text)), true));
  try {
    const status = await verb.run(args);
    return { status, out, err };
  } finally {
    stdout.mockRestore();
    stderr.mockRestore();
  }
}
