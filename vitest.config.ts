import { defineConfig } from 'vitest/config';

// Forks, never threads: the serial driver aborts Node inside a worker thread.
const common = {
  environment: 'node' as const,
  pool: 'forks' as const,
  // On two cores helpers of the collector only take turns with the tests.
  execArgv: ['--single-threaded-gc', '--max-semi-space-size=64'],
  setupFiles: ['tests/helpers/no-stray-console.ts'],
};

// Files of these projects share their modules (isolate: false): nothing of ours keeps state outside what a test makes, and loading
// everything anew for each file took longer than the tests.
export default defineConfig({
  test: {
    // One more than two cores: browsers and timers are waited for. Each file has a database and a port of its own, each worker a browser.
    maxWorkers: 3,
    globalSetup: ['tests/helpers/database-cluster.ts'],
    projects: [
      {
        test: {
          ...common,
          name: 'unit',
          isolate: false,
          include: ['tests/shared/**/*.test.ts', 'tests/cli/**/*.test.ts', 'tests/web/**/*.test.ts', 'tests/house/**/*.test.ts'],
          testTimeout: 30_000,
        },
      },
      {
        test: {
          ...common,
          name: 'server',
          isolate: false,
          include: ['tests/server/**/*.test.ts'],
          testTimeout: 30_000,
          hookTimeout: 60_000,
        },
      },
      {
        test: {
          ...common,
          name: 'browser',
          isolate: false,
          include: ['tests/browser/**/*.test.ts'],
          globalSetup: ['tests/helpers/build-web.ts'],
          testTimeout: 180_000,
          hookTimeout: 180_000,
        },
      },
    ],
  },
});
