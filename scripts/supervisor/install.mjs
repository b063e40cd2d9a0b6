import { accessSync, constants, existsSync, readFileSync, rmSync, writeFileSync } from 'node:fs';
import { createHash } from 'node:crypto';
import path from 'node:path';
import { Refusal, say } from './console.mjs';
import { root } from './paths.mjs';
import { run } from './commands.mjs';

const searchPath = ['/usr/sbin', '/usr/bin', '/usr/local/bin', '/usr/local/sbin', '/bin', '/sbin'];

/** Where a program is, or null. Daemons stand in sbin, which a plain user's PATH may lack. */
export function findProgram(name) {
  for (const folder of [...(process.env.PATH ?? '').split(':'), ...searchPath]) {
    const file = path.join(folder, name);
    try {
      accessSync(file, constants.X_OK);
      return file;
    } catch {
      continue;
    }
  }
  return null;
}

/** Programs that we start, and the Debian packages that bring them without starting a system service of MariaDB's. */
const debian = {
  mariadbd: ['mariadb-server-core'],
  'mariadb-install-db': ['mariadb-server-core'],
  mariadb: ['mariadb-client-core'],
  'redis-server': ['redis-server'],
  chromium: ['chromium'],
  curl: ['curl'],
  jq: ['jq'],
};

export function refuseOtherNode() {
  const major = Number(process.versions.node.split('.')[0]);
  if (major !== 20) {
    throw new Refusal(`Beatnote runs on Node.js 20; this is ${process.versions.node}.`);
  }
}

const lockHash = () =>
  createHash('sha256')
    .update(readFileSync(path.join(root, 'package-lock.json')))
    .digest('hex');

/** npm packages exactly as locked; done again only when the lock file has changed. */
export async function installNodePackages() {
  const stamp = path.join(root, 'node_modules', '.beatnote-lock');
  const wanted = lockHash();
  if (existsSync(stamp) && readFileSync(stamp, 'utf8') === wanted) return;
  say('Installing the npm packages of package-lock.json');
  await run('npm', ['ci', '--no-audit', '--no-fund', '--loglevel=warn'], { quiet: true, cwd: root });
  writeFileSync(stamp, wanted);
}

/**
 * Debian's packages for those of `programs` that are missing. While they install, a policy file keeps their system
 * services from starting: we start our own, on loopback, in our own folder.
 */
export async function installDebianPackages(programs) {
  const missing = programs.filter((program) => findProgram(program) === null);
  if (missing.length === 0) return;
  const packages = [...new Set(missing.flatMap((program) => debian[program]))];
  const isRoot = process.getuid() === 0;
  const prefix = isRoot ? [] : ['sudo', '-n'];
  const byHand = `apt-get update && apt-get install -y --no-install-recommends ${packages.join(' ')}`;
  if (findProgram('apt-get') === null) {
    throw new Refusal(`Missing: ${missing.join(', ')}. This isn't Debian: install them and start again.`);
  }
  if (!isRoot && (await run('sudo', ['-n', 'true'], { quiet: true, check: false })).code !== 0) {
    throw new Refusal(
      `Missing: ${missing.join(', ')}. Installing them needs root. Run this, then start again:\n\n  sudo sh -c '${byHand}'\n`,
    );
  }
  say(`Installing Debian's ${packages.join(', ')} (their system services stay off)`);
  const env = { ...process.env, DEBIAN_FRONTEND: 'noninteractive' };
  const asRoot = (args, options = {}) => {
    const [command, ...rest] = [...prefix, ...args];
    return run(command, rest, { quiet: true, env, ...options });
  };
  const lock = ['-o', 'DPkg::Lock::Timeout=120'];
  const policy = '/usr/sbin/policy-rc.d';
  const policyIsOurs = !existsSync(policy);
  if (policyIsOurs) {
    await asRoot(['tee', policy], { input: '#!/bin/sh\nexit 101\n' });
    await asRoot(['chmod', '755', policy]);
  }
  try {
    await asRoot(['apt-get', ...lock, 'update', '-qq'], { check: false });
    await asRoot(['apt-get', ...lock, 'install', '-y', '--no-install-recommends', ...packages]);
  } finally {
    if (policyIsOurs) {
      if (isRoot) rmSync(policy, { force: true });
      else await asRoot(['rm', '-f', policy], { check: false });
    }
  }
  const still = programs.filter((program) => findProgram(program) === null);
  if (still.length > 0) throw new Refusal(`Installed, but still missing: ${still.join(', ')}.`);
}
