import { fileURLToPath } from 'node:url';
import { defineConfig } from 'vitest/config';

export default defineConfig({
  root: fileURLToPath(new URL('..', import.meta.url)),
  test: {
    include: ['test/**/*.test.ts'],
    testTimeout: 60_000,
    globalSetup: [fileURLToPath(new URL('./support/built.ts', import.meta.url))],
    reporters: ['default', fileURLToPath(new URL('./support/reporter.ts', import.meta.url))],
  },
});
