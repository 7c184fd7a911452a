import { defineConfig } from 'vitest/config';

export default defineConfig({
  test: {
    include: ['test/**/*.test.ts'],
    pool: 'forks',
    maxWorkers: 2,
    testTimeout: 20_000,
    globalSetup: ['./scripts/test-setup.mjs'],
    reporters: ['default', './scripts/count-reporter.mjs'],
    coverage: {
      provider: 'v8',
      include: ['src/**'],
      reporter: ['text-summary'],
    },
  },
});
