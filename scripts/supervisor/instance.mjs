import { randomBytes } from 'node:crypto';
import { setTimeout as sleep } from 'node:timers/promises';
import path from 'node:path';
import { Refusal, say } from './console.mjs';
import { Supervised, claimState, endLeftovers } from './processes.mjs';
import { answers, startMailCatcher, startMariadb, startObjectStore, startRedis } from './services.mjs';
import { choosePorts } from './ports.mjs';
import { ensureBuild } from './build.mjs';
import { readJson, root, stateFolder, writePrivateJson } from './paths.mjs';
import { run } from './commands.mjs';

/** A page leaves some megabytes behind at once: with room for several of them most are gone before anything is copied. */
const newSpace = '--max-semi-space-size=64';

/** How workers rank beside the web server, the database and Redis, which are at 0: where both want a core, a third to one. */
const workerNice = 5;

const loopback = ['127.0.0.1', 'localhost', '::1'];

function secrets(state) {
  const file = path.join(state, 'secrets.json');
  const known = readJson(file, {});
  const all = {
    authSecret: known.authSecret ?? randomBytes(32).toString('base64url'),
    databasePassword: known.databasePassword ?? randomBytes(24).toString('base64url'),
  };
  writePrivateJson(file, all);
  return all;
}

/**
 * One running Beatnote: its services, its web server, its worker. `start` brings up what isn't given by the
 * environment; `stop` ends all of it, in order.
 */
export class Instance {
  #state = stateFolder();
  #services = [];
  #web = null;
  #worker = null;
  #releaseBuild = () => {};
  #releaseState = () => {};
  #stopping = false;
  environment = {};

  get state() {
    return this.#state;
  }

  async #startServices() {
    const given = process.env;
    const { authSecret, databasePassword } = secrets(this.#state);
    const ports = await choosePorts(this.#state, ['database', 'redis', 'objects', 'mail']);
    const keep = ({ server, url }) => {
      this.#services.unshift(server);
      return url;
    };
    const state = this.#state;
    const bucket = given.S3_BUCKET ?? 'beatnote';
    const port = Number(given.PORT ?? 3000);
    const host = given.HOST ?? '127.0.0.1';
    say('Starting MariaDB, Redis, the object store and the mail catcher on loopback');
    const [database, redis, objects, mail] = await Promise.all([
      given.DATABASE_URL ??
        startMariadb({ state, port: ports.database, password: databasePassword }).then(keep),
      given.REDIS_URL ?? startRedis({ state, port: ports.redis }).then(keep),
      given.S3_ENDPOINT ?? startObjectStore({ state, port: ports.objects, bucket }).then(keep),
      given.SMTP_URL ?? startMailCatcher({ state, port: ports.mail }).then(keep),
    ]);
    const local = given.S3_ENDPOINT === undefined;
    this.environment = {
      PORT: String(port),
      HOST: host,
      BEATNOTE_STATE: state,
      BEATNOTE_URL: given.BEATNOTE_URL ?? `http://${loopback.includes(host) ? host : '127.0.0.1'}:${port}`,
      DATABASE_URL: database,
      REDIS_URL: redis,
      S3_ENDPOINT: objects,
      S3_BUCKET: bucket,
      S3_ACCESS_KEY_ID: given.S3_ACCESS_KEY_ID ?? (local ? 'S3RVER' : ''),
      S3_SECRET_ACCESS_KEY: given.S3_SECRET_ACCESS_KEY ?? (local ? 'S3RVER' : ''),
      SMTP_URL: mail,
      MAIL_FROM: given.MAIL_FROM ?? 'Beatnote <notes@beatnote.example>',
      AUTH_SECRET: given.AUTH_SECRET ?? authSecret,
      ...(given.SMTP_URL === undefined ? { BEATNOTE_MAIL_DIR: path.join(state, 'mail') } : {}),
    };
    writePrivateJson(path.join(state, 'instance.json'), this.environment);
  }

  /** The environment of our own processes: the caller's, and on top what this instance settled. */
  get childEnvironment() {
    return {
      ...process.env,
      ...this.environment,
      NODE_ENV: 'production',
      NEXT_TELEMETRY_DISABLED: '1',
      AWS_SDK_JS_NODE_VERSION_SUPPORT_WARNING_DISABLED: 'true',
    };
  }

  /** Runs one of the project's TypeScript scripts against this instance. */
  script(name, args = [], options = {}) {
    return run(process.execPath, ['--import', 'tsx', `scripts/${name}.ts`, ...args], {
      quiet: true,
      cwd: root,
      env: this.childEnvironment,
      ...options,
    });
  }

  async #refuseTakenPort() {
    const port = Number(process.env.PORT ?? 3000);
    if (await answers(port)) {
      throw new Refusal(
        `Port ${port} is taken. Stop what listens there, or choose another: PORT=3001 npm start`,
      );
    }
  }

  async start() {
    this.#releaseState = claimState(this.#state);
    await endLeftovers(this.#state);
    await this.#refuseTakenPort();
    await Promise.all([
      this.#startServices(),
      ensureBuild().then((release) => {
        this.#releaseBuild = release;
      }),
    ]);
    if (this.#stopping) return;
    say('Bringing the tables up to date');
    await this.script('migrate');
    await this.script('seed-demo');
    if (this.#stopping) return;
    const { PORT, HOST } = this.environment;
    this.#web = new Supervised({
      name: 'web',
      state: this.#state,
      command: process.execPath,
      args: [newSpace, 'node_modules/next/dist/bin/next', 'start', '--hostname', HOST, '--port', PORT],
      env: { ...this.childEnvironment, AUTH_URL: this.environment.BEATNOTE_URL },
      cwd: root,
      patience: 5_000,
    });
    this.#worker = new Supervised({
      name: 'worker',
      state: this.#state,
      command: process.execPath,
      args: ['--enable-source-maps', 'dist/worker/main.mjs'],
      nice: workerNice,
      env: this.childEnvironment,
      cwd: root,
      patience: 15_000,
    });
    this.#web.start();
    this.#worker.start();
    await this.#ready();
  }

  async #ready() {
    const { PORT, HOST } = this.environment;
    const host = HOST === '0.0.0.0' ? '127.0.0.1' : HOST;
    const until = Date.now() + 90_000;
    while (Date.now() < until && !this.#stopping) {
      try {
        const response = await fetch(`http://${host}:${PORT}/api/v1/health`);
        const health = await response.json();
        if (response.status === 200 && health.status === 'ok' && health.workers > 0) return;
      } catch {
        // Not listening yet.
      }
      await sleep(150);
    }
    if (!this.#stopping) {
      throw new Error(`The web server isn't ready after 90 s; see ${path.join(this.#state, 'log')}.`);
    }
  }

  processes() {
    return { web: this.#web?.pid ?? null, worker: this.#worker?.pid ?? null };
  }

  /** Web first, so that nothing new comes in; then the worker, which puts its block down; then what they stood on. */
  async stop() {
    if (this.#stopping) return;
    this.#stopping = true;
    await this.#web?.stop();
    await this.#worker?.stop();
    for (const service of this.#services) await service.stop();
    this.#releaseBuild();
    this.#releaseState();
  }
}
