import path from 'node:path';
import { fileURLToPath } from 'node:url';
import { build } from 'esbuild';

/** Bundles our own sources of the worker and its threads; packages stay outside. Threads need files of their own. */
const root = path.dirname(path.dirname(fileURLToPath(import.meta.url)));

await build({
  absWorkingDir: root,
  entryPoints: {
    main: 'worker/main.ts',
    'replica-thread': 'worker/replica-thread.ts',
    'report-thread': 'worker/report-thread.ts',
    'check-thread': 'worker/check-thread.ts',
    'scan-thread': 'worker/scan-thread.ts',
    // Threads of the web processes.
    'preflight-thread': 'lib/services/preflight-thread.ts',
    'sample-thread': 'lib/services/sample-thread.ts',
  },
  outdir: 'dist/worker',
  outExtension: { '.js': '.mjs' },
  bundle: true,
  format: 'esm',
  platform: 'node',
  target: 'node20',
  packages: 'external',
  alias: { '@': root },
  sourcemap: true,
  logLevel: 'warning',
});
