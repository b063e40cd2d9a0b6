import { chmodSync, mkdirSync, mkdtempSync, readdirSync, rmSync } from 'node:fs';
import { randomBytes } from 'node:crypto';
import { tmpdir } from 'node:os';
import path from 'node:path';
import { run } from '../../scripts/supervisor/commands.mjs';
import { root } from '../../scripts/supervisor/paths.mjs';
import { choosePorts } from '../../scripts/supervisor/ports.mjs';
import { endLeftovers, isAlive } from '../../scripts/supervisor/processes.mjs';
import {
  startMailCatcher,
  startMariadb,
  startObjectStore,
  startRedis,
} from '../../scripts/supervisor/services.mjs';

/** Private services for one run of the tests: the same programs as `npm start`, on free ports, in a folder of their own. */
const folders = path.join(tmpdir(), `beatnote-tests-${process.getuid()}`);

/** A run that was killed leaves its services behind; the next one ends them. */
async function endAbandoned() {
  for (const name of readdirSync(folders)) {
    if (isAlive(Number(name.split('-')[0]))) continue;
    const folder = path.join(folders, name);
    await endLeftovers(folder).catch(() => undefined);
    rmSync(folder, { recursive: true, force: true });
  }
}

function createFolder() {
  const state = mkdtempSync(path.join(folders, `${process.pid}-`));
  for (const part of ['log', 'pid', 'mail', 'objects', 'redis']) {
    mkdirSync(path.join(state, part), { mode: 0o700 });
  }
  return state;
}

export default async function setup() {
  mkdirSync(folders, { recursive: true, mode: 0o700 });
  chmodSync(folders, 0o700);
  await endAbandoned();
  const state = createFolder();
  const ports = await choosePorts(state, ['database', 'redis', 'objects', 'mail', 'web']);
  const bucket = 'beatnote-tests';
  const started = await Promise.all([
    startMariadb({ state, port: ports.database, password: randomBytes(12).toString('hex') }),
    startRedis({ state, port: ports.redis }),
    startObjectStore({ state, port: ports.objects, bucket }),
    startMailCatcher({ state, port: ports.mail }),
  ]);
  const [database, redis, objects, mail] = started;
  Object.assign(process.env, {
    PORT: String(ports.web),
    HOST: '127.0.0.1',
    BEATNOTE_STATE: state,
    BEATNOTE_URL: `http://127.0.0.1:${ports.web}`,
    DATABASE_URL: database.url,
    REDIS_URL: redis.url,
    S3_ENDPOINT: objects.url,
    S3_BUCKET: bucket,
    S3_ACCESS_KEY_ID: 'S3RVER',
    S3_SECRET_ACCESS_KEY: 'S3RVER',
    SMTP_URL: mail.url,
    MAIL_FROM: 'Beatnote <notes@beatnote.example>',
    AUTH_SECRET: randomBytes(32).toString('hex'),
    BEATNOTE_MAIL_DIR: path.join(state, 'mail'),
    LOG_LEVEL: process.env.LOG_LEVEL ?? 'silent',
  });
  await run(process.execPath, ['--import', 'tsx', 'scripts/migrate.ts'], { quiet: true, cwd: root });
  return async () => {
    for (const { server } of started.toReversed()) await server.stop();
    rmSync(state, { recursive: true, force: true });
  };
}
