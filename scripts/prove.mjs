import { existsSync } from 'node:fs';
import path from 'node:path';
import { Refusal, say } from './supervisor/console.mjs';
import { endRunningCommands, run } from './supervisor/commands.mjs';
import { installDebianPackages, installNodePackages, refuseOtherNode } from './supervisor/install.mjs';
import { root } from './supervisor/paths.mjs';

/**
 * `npm run prove -- [NAME]`: the statistical proofs at full size, each written to docs/proof/NAME.json with its verdict.
 * Without a name, all of them; that takes hours.
 */

for (const name of ['SIGINT', 'SIGTERM']) {
  process.on(name, () => {
    endRunningCommands();
    process.exit(1);
  });
}

/** The proofs of one vitest project; those against real services live in tests/faults, the others in tests/proofs. */
async function prove(project, folder, name) {
  say(`Proofs: ${folder}`);
  const title = name === undefined ? '(^| )proof ' : `(^| )proof ${name}:`;
  const args = ['node_modules/vitest/vitest.mjs', 'run', '--project', project, folder, '-t', title];
  const env = { ...process.env, BEATNOTE_PROVE: name ?? 'all' };
  const { code } = await run(process.execPath, [...args, '--passWithNoTests'], {
    check: false,
    cwd: root,
    env,
  });
  return code;
}

try {
  const name = process.argv[2];
  if (name !== undefined && !/^[a-z0-9-]+$/.test(name)) {
    throw new Refusal(`"${name}" is no proof's name: they are the file names of docs/proof, without .json.`);
  }
  refuseOtherNode();
  await installNodePackages();
  await installDebianPackages(['mariadbd', 'mariadb-install-db', 'mariadb', 'redis-server']);
  const codes = [await prove('pure', 'tests/proofs', name), await prove('integration', 'tests/faults', name)];
  if (name !== undefined && !existsSync(path.join(root, 'docs', 'proof', `${name}.json`))) {
    throw new Refusal(`There is no proof named "${name}".`);
  }
  process.exitCode = Math.max(...codes);
} catch (error) {
  process.stdout.write(`${error instanceof Refusal ? error.message : (error.stack ?? error)}\n`);
  process.exitCode = 1;
}
