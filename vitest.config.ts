import { defineConfig } from 'vitest/config';

export default defineConfig({
  test: {
    include: ['tests/**/*.test.ts', 'tests/**/*.test.tsx'],
    benchmark: { include: ['tests/bench/**/*.bench.ts'] },
    globalSetup: ['tests/build-once.ts'],
    setupFiles: ['tests/seeded-laws.ts'],
    reporters: ['default', './tests/closing-line.ts'],
    testTimeout: 60_000,
    maxWorkers: 2,
  },
});
