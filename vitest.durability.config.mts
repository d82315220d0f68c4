import { defineConfig } from 'vitest/config';

export default defineConfig({
  test: {
    name: 'durability',
    environment: 'node',
    include: ['tests/durability/**/*.test.ts'],
    testTimeout: 900_000,
    hookTimeout: 300_000,
    // One server at a time: the tests are about when it dies.
    fileParallelism: false,
  },
});
