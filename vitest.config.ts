import { defineConfig } from 'vitest/config';
import { fileURLToPath } from 'node:url';

const root = fileURLToPath(new URL('.', import.meta.url));

/** `pure` needs no service; `integration` and `faults` run against real MariaDB, Redis and object store. */
export default defineConfig({
  resolve: { alias: { '@': root.replace(/\/$/, '') } },
  test: {
    projects: [
      {
        extends: true,
        test: {
          name: 'pure',
          include: ['tests/{lib,published,components,scripts}/**/*.test.{ts,tsx}'],
          exclude: ['tests/lib/services/**'],
          testTimeout: 120_000,
        },
      },
      {
        extends: true,
        test: {
          name: 'integration',
          include: ['tests/{integration,faults}/**/*.test.ts'],
          fileParallelism: false,
          testTimeout: 180_000,
          hookTimeout: 120_000,
        },
      },
    ],
  },
});
