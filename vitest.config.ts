import { defineConfig } from 'vitest/config';

// Two rooms. `pure` holds everything that touches nothing outside the process and may share one thread; `real`
// starts processes, brokers, ptys and disks, and gets a process of its own for each file.
const REAL = 'tests/real/**/*.test.ts';

export default defineConfig({
  test: {
    projects: [
      {
        test: {
          name: 'pure',
          include: ['tests/**/*.test.ts'],
          exclude: [REAL],
          pool: 'threads',
          isolate: false,
          testTimeout: 30_000,
        },
      },
      {
        test: {
          name: 'real',
          include: [REAL],
          pool: 'forks',
          fileParallelism: false,
          globalSetup: ['tests/real/build.ts'],
          testTimeout: 120_000,
          hookTimeout: 60_000,
        },
      },
    ],
  },
});
