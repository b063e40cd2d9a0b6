import { mkdirSync, readFileSync, rmSync } from 'node:fs';
import path from 'node:path';
import { Refusal, say } from './supervisor/console.mjs';
import { endRunningCommands, run } from './supervisor/commands.mjs';
import { installDebianPackages, installNodePackages, refuseOtherNode } from './supervisor/install.mjs';
import { root } from './supervisor/paths.mjs';

/**
 * `npm test`: the whole gate. Types, lint, format, pure tests, tests against real services, a whole instance in a
 * browser. Ends with one line `N passed, M failed`; a runner that crashed counts as failed.
 */

const reports = path.join(root, '.state-test', 'reports');
let passed = 0;
let failed = 0;

for (const name of ['SIGINT', 'SIGTERM']) {
  process.on(name, () => {
    endRunningCommands();
    process.exit(1);
  });
}

/** A check that passes or fails as a whole. */
async function check(title, command, args) {
  say(title);
  const { code, output } = await run(command, args, { quiet: true, check: false, cwd: root });
  if (code === 0) {
    passed += 1;
  } else {
    failed += 1;
    process.stdout.write(`FAILED ${title}\n${output.slice(-8000)}\n`);
  }
}

/** One vitest project, counted by its own report. */
async function suite(project, env = {}) {
  say(`Tests: ${project}`);
  const file = path.join(reports, `${project}.json`);
  rmSync(file, { force: true });
  const args = [
    'node_modules/vitest/vitest.mjs',
    'run',
    ...['--project', project],
    '--reporter=default',
    '--reporter=json',
    `--outputFile.json=${file}`,
  ];
  const { code, output } = await run(process.execPath, args, {
    quiet: true,
    check: false,
    cwd: root,
    env: { ...process.env, NEXT_TELEMETRY_DISABLED: '1', ...env },
  });
  let report;
  try {
    report = JSON.parse(readFileSync(file, 'utf8'));
  } catch {
    report = { numPassedTests: 0, numFailedTests: 0, numFailedTestSuites: 1 };
  }
  passed += report.numPassedTests;
  // A file that failed without a test of its own that did (not loaded, or its set-up failed) counts as one, and so does a
  // crash after the last test.
  const broken = (report.testResults ?? []).filter(
    ({ status, assertionResults }) =>
      status === 'failed' && !assertionResults.some((each) => each.status === 'failed'),
  ).length;
  const faults = report.numFailedTests + broken;
  failed += code !== 0 && faults === 0 ? 1 : faults;
  if (code !== 0) process.stdout.write(`${output.slice(-20_000)}\n`);
  say(`  ${report.numPassedTests} passed, ${faults} failed`);
}

try {
  refuseOtherNode();
  await installNodePackages();
  const services = ['mariadbd', 'mariadb-install-db', 'mariadb', 'redis-server'];
  await installDebianPackages([...services, 'chromium', 'curl', 'jq']);
  rmSync(path.join(root, '.state-test'), { recursive: true, force: true });
  mkdirSync(reports, { recursive: true, mode: 0o700 });
  const node = process.execPath;
  await check('Types of routes', node, ['node_modules/next/dist/bin/next', 'typegen']);
  await check('Types', node, ['node_modules/typescript/bin/tsc', '--noEmit', '-p', '.']);
  await check('Lint', node, ['node_modules/eslint/bin/eslint.js', '--max-warnings', '0', '.']);
  await check('Format', node, ['node_modules/prettier/bin/prettier.cjs', '--check', '.']);
  await check('Worker bundle', node, ['scripts/build-worker.mjs']);
  await suite('pure');
  await suite('integration');
  await suite('browser');
} catch (error) {
  failed += 1;
  process.stdout.write(`${error instanceof Refusal ? error.message : (error.stack ?? error)}\n`);
}
process.stdout.write(`${passed} passed, ${failed} failed\n`);
process.exit(failed === 0 && passed > 0 ? 0 : 1);
