import { defineConfig } from 'vitest/config';

/** Long statistics, not part of `npm test`: `npm run validate`. */
export default defineConfig({
  test: {
    include: ['tests/validate/**/*.test.ts'],
    environment: 'node',
    testTimeout: 3_600_000,
    hookTimeout: 3_600_000,
    maxWorkers: 2,
    env: { TZ: 'UTC' },
  },
});
