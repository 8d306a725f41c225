import { execFileSync } from 'node:child_process';
import { readdirSync, statSync } from 'node:fs';
import { join } from 'node:path';

/** The tests in this room run the built program: it is built anew when any source is newer than it. */
export default function setup(): void {
  const root = join(import.meta.dirname, '..', '..');
  const newest = Math.max(...['src', 'adapters'].map((folder) => newestIn(join(root, folder))));
  const built = join(root, 'dist', 'src', 'main.js');
  let builtAt = 0;
  try {
    builtAt = statSync(built).mtimeMs;
  } catch {
    // not built yet
  }
  if (newest > builtAt) execFileSync('npm', ['run', 'build', '--silent'], { cwd: root, stdio: 'inherit' });
}

function newestIn(folder: string): number {
  return Math.max(
    0,
    ...readdirSync(folder, { recursive: true, withFileTypes: true })
      .filter((entry) => entry.isFile())
      .map((entry) => statSync(join(entry.parentPath, entry.name)).mtimeMs),
  );
}
