import { defineConfig } from 'vitest/config';

export default defineConfig({
  root: new URL('..', import.meta.url).pathname,
  test: {
    include: ['test/**/*.test.ts'],
    setupFiles: ['test/seed.ts'],
    testTimeout: 120_000,
    hookTimeout: 300_000,
  },
});
