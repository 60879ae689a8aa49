import { defineConfig } from 'vitest/config';

/** Browser tests: the built server, a fresh data directory, headless Chromium. One file at a time. */
export default defineConfig({
  test: {
    include: ['tests/e2e/**/*.test.ts'],
    environment: 'node',
    testTimeout: 180_000,
    hookTimeout: 180_000,
    maxWorkers: 1,
    fileParallelism: false,
    env: { TZ: 'UTC' },
  },
});
