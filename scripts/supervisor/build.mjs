import { existsSync, mkdirSync, readFileSync, readdirSync, rmSync, statSync, writeFileSync } from 'node:fs';
import { setTimeout as sleep } from 'node:timers/promises';
import { createHash } from 'node:crypto';
import path from 'node:path';
import { Refusal, say } from './console.mjs';
import { isAlive } from './processes.mjs';
import { root } from './paths.mjs';
import { run } from './commands.mjs';

const sources = [
  'app',
  'components',
  'lib',
  'models',
  'storage',
  'worker',
  'package.json',
  'package-lock.json',
  'next.config.ts',
  'tailwind.config.ts',
  'postcss.config.mjs',
  'tsconfig.json',
  'scripts/build-worker.mjs',
];

function* filesOf(place) {
  if (!existsSync(place)) return;
  if (statSync(place).isFile()) {
    yield place;
    return;
  }
  for (const entry of readdirSync(place).sort()) yield* filesOf(path.join(place, entry));
}

/** SHA-256 over names and contents of everything that goes into the build. */
function sourceHash() {
  const hash = createHash('sha256');
  for (const source of sources) {
    for (const file of filesOf(path.join(root, source))) {
      hash.update(path.relative(root, file)).update('\0').update(readFileSync(file)).update('\0');
    }
  }
  return hash.digest('hex');
}

const stampFile = path.join(root, '.next', 'beatnote-sources');
const lockFolder = path.join(root, '.next-lock');
const instances = path.join(root, '.next-lock-instances');

const builtHash = () => (existsSync(stampFile) ? readFileSync(stampFile, 'utf8') : '');

const liveInstances = () =>
  existsSync(instances) ? readdirSync(instances).filter((pid) => isAlive(Number(pid))) : [];

/** Says that this supervisor runs from the present build; gives the way to take it back. */
function registerInstance() {
  mkdirSync(instances, { recursive: true });
  const mine = path.join(instances, String(process.pid));
  writeFileSync(mine, '');
  return () => rmSync(mine, { force: true });
}

async function withBuildLock(work) {
  const owner = path.join(lockFolder, 'pid');
  for (;;) {
    try {
      mkdirSync(lockFolder);
      writeFileSync(owner, String(process.pid));
      break;
    } catch {
      const pid = existsSync(owner) ? Number(readFileSync(owner, 'utf8')) : 0;
      if (pid > 0 && !isAlive(pid)) rmSync(lockFolder, { recursive: true, force: true });
      await sleep(300);
    }
  }
  try {
    return await work();
  } finally {
    rmSync(lockFolder, { recursive: true, force: true });
  }
}

/**
 * Builds pages and worker if their sources have changed, one at a time, and never under a running instance of the
 * same folder. Resolves to the function that ends this instance's claim on the build.
 */
export async function ensureBuild() {
  return withBuildLock(async () => {
    const wanted = sourceHash();
    if (builtHash() !== wanted) {
      const others = liveInstances();
      if (others.length > 0) {
        throw new Refusal(
          `The sources have changed, but another instance runs from this folder's build (process ${others.join(', ')}). Stop it first.`,
        );
      }
      say('Building pages and worker');
      rmSync(stampFile, { force: true });
      const env = { ...process.env, NEXT_TELEMETRY_DISABLED: '1', NODE_ENV: 'production' };
      await run(process.execPath, ['node_modules/next/dist/bin/next', 'build'], {
        quiet: true,
        cwd: root,
        env,
      });
      await run(process.execPath, ['scripts/build-worker.mjs'], { quiet: true, cwd: root, env });
      writeFileSync(stampFile, wanted);
    }
    return registerInstance();
  });
}
