import { defineConfig } from 'vitest/config';
import { fileURLToPath } from 'node:url';

const root = fileURLToPath(new URL('.', import.meta.url));

/**
 * `pure` needs no service; `integration` runs against real MariaDB, Redis and object store; `browser` against a whole
 * instance that `npm start` has brought up.
 */
export default defineConfig({
  resolve: { alias: { '@': root.replace(/\/$/, '') } },
  test: {
    projects: [
      {
        extends: true,
        test: {
          name: 'pure',
          include: ['tests/{lib,published,proofs,components,scripts,worker}/**/*.test.{ts,tsx}'],
          testTimeout: 120_000,
        },
      },
      {
        extends: true,
        test: {
          name: 'integration',
          include: ['tests/{integration,faults}/**/*.test.ts'],
          globalSetup: ['tests/integration/services.mjs'],
          fileParallelism: false,
          testTimeout: 180_000,
          hookTimeout: 120_000,
        },
      },
      {
        extends: true,
        test: {
          name: 'browser',
          include: ['tests/browser/**/*.test.ts'],
          globalSetup: 'tests/browser/services.ts',
          fileParallelism: false,
          testTimeout: 180_000,
          hookTimeout: 300_000,
        },
      },
    ],
  },
});
