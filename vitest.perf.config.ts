import { defineConfig } from 'vitest/config';

// Measurements that print numbers: run by hand, on a machine that does nothing else.
export default defineConfig({
  test: {
    environment: 'node',
    pool: 'forks',
    include: ['tests/perf/**/*.test.ts'],
    globalSetup: ['tests/perf/durable-cluster.ts', 'tests/helpers/build-web.ts'],
    fileParallelism: false,
    hookTimeout: 180_000,
  },
});
