import { defineConfig } from 'vitest/config';

/** The built client in Chromium against the built server; one file at a time, since they share one server and two cores. */
export default defineConfig({
  test: {
    name: 'browser',
    environment: 'node',
    include: ['tests/browser/**/*.test.ts'],
    globalSetup: ['tests/browser/serve.ts'],
    fileParallelism: false,
    testTimeout: 120_000,
    hookTimeout: 120_000,
    teardownTimeout: 30_000,
  },
});
