import { spawn } from 'node:child_process';
import path from 'node:path';
import { readJson, root, stateFolder } from './supervisor/paths.mjs';

/**
 * `npm run worker`: one more worker. It reaches database, Redis and object store by the environment; what isn't set
 * there is taken from the instance that runs in BEATNOTE_STATE.
 */
const known = readJson(path.join(stateFolder(), 'instance.json'), {});
const env = { ...known, ...process.env, NODE_ENV: 'production' };
if (!env.DATABASE_URL || !env.REDIS_URL) {
  process.stderr.write('No instance runs in BEATNOTE_STATE and DATABASE_URL or REDIS_URL is not set.\n');
  process.exit(1);
}
const child = spawn(process.execPath, ['--enable-source-maps', 'dist/worker/main.mjs'], {
  cwd: root,
  env,
  stdio: 'inherit',
});
for (const name of ['SIGINT', 'SIGTERM']) process.on(name, () => child.kill(name));
child.on('exit', (code, by) => process.exit(by ? 1 : (code ?? 1)));
