import { defineConfig } from 'vitest/config';

/** Slow or optional comparisons with outside programs, apart from the tests that always run. */
export default defineConfig({
  test: {
    include: ['test/validate/**/*.test.ts'],
    testTimeout: 600_000,
    pool: 'forks',
    maxWorkers: 2,
    expect: { requireAssertions: true },
  },
});
