import { defineConfig } from 'vitest/config';

/** Truth in, truth out: whole days through the whole chain. One file at a time, each uses both cores by itself. */
export default defineConfig({
  test: {
    name: 'chain',
    environment: 'node',
    include: ['tests/chain/**/*.test.ts'],
    fileParallelism: false,
    testTimeout: 600_000,
    hookTimeout: 600_000,
  },
});
