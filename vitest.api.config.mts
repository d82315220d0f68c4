import { defineConfig } from 'vitest/config';

export default defineConfig({
  test: {
    name: 'api',
    environment: 'node',
    include: ['tests/api/**/*.test.ts'],
    globalSetup: ['tests/api/prepare.ts'],
    testTimeout: 60_000,
    hookTimeout: 60_000,
    // Each file has a database of its own; two at once is what two cores bear.
    maxWorkers: 2,
  },
});
