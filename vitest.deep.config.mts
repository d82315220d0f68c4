import { defineConfig } from 'vitest/config';

/** The long harnesses, minutes to an hour: big fuzz, and hundreds of kills by `GUSTBOOK_KILL_ROUNDS`. */
process.env.GUSTBOOK_KILL_ROUNDS ??= '240';

export default defineConfig({
  test: {
    name: 'deep',
    environment: 'node',
    include: ['tests/deep/**/*.test.ts', 'tests/durability/**/*.test.ts'],
    fileParallelism: false,
    testTimeout: 5_400_000,
    hookTimeout: 600_000,
  },
});
