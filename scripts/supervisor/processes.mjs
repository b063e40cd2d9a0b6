import {
  existsSync,
  openSync,
  readFileSync,
  readdirSync,
  rmSync,
  statSync,
  truncateSync,
  writeFileSync,
} from 'node:fs';
import { setTimeout as sleep } from 'node:timers/promises';
import { spawn } from 'node:child_process';
import path from 'node:path';
import { Refusal, say } from './console.mjs';

const commandLine = (pid) => {
  try {
    return readFileSync(`/proc/${pid}/cmdline`, 'utf8').replaceAll('\0', ' ').trim();
  } catch {
    return '';
  }
};

export const isAlive = (pid) => {
  try {
    process.kill(pid, 0);
    return !/\) Z /.test(readFileSync(`/proc/${pid}/stat`, 'utf8'));
  } catch {
    return false;
  }
};

const signal = (pid, name) => {
  try {
    process.kill(-pid, name);
  } catch {
    try {
      process.kill(pid, name);
    } catch {
      // It has ended.
    }
  }
};

/** Asks a process to end, and ends it after `patience` ms. */
async function end(pid, patience) {
  signal(pid, 'SIGTERM');
  const until = Date.now() + patience;
  while (isAlive(pid) && Date.now() < until) await sleep(50);
  if (isAlive(pid)) signal(pid, 'SIGKILL');
  while (isAlive(pid)) await sleep(20);
}

/** One supervisor a state folder: claims it, or says whose it is. Its pid file is the last to go. */
export function claimState(state) {
  const file = path.join(state, 'supervisor.pid');
  const [pidText = '', ...rest] = existsSync(file) ? readFileSync(file, 'utf8').split('\n') : [];
  const pid = Number(pidText);
  if (pid > 1 && pid !== process.pid && isAlive(pid) && commandLine(pid) === rest.join('\n').trim()) {
    throw new Refusal(
      `An instance runs from ${state} already (process ${pid}). Stop it first, or name another folder: BEATNOTE_STATE=.state-two PORT=3001 npm start`,
    );
  }
  writeFileSync(file, `${process.pid}\n${commandLine(process.pid)}`, { mode: 0o600 });
  return () => rmSync(file, { force: true });
}

/** Ends what an earlier supervisor left behind when it was killed: known by pid file and command line. */
export async function endLeftovers(state) {
  const folder = path.join(state, 'pid');
  for (const file of readdirSync(folder)) {
    const place = path.join(folder, file);
    const [pidText, ...rest] = readFileSync(place, 'utf8').split('\n');
    const pid = Number(pidText);
    if (pid > 1 && isAlive(pid) && commandLine(pid) === rest.join('\n').trim()) {
      say(`Ending ${file} left over from before (process ${pid})`);
      await end(pid, file === 'mariadb' ? 30_000 : 5_000);
    }
    rmSync(place, { force: true });
  }
}

/**
 * Sets how a process that leads a session ranks beside other sessions, −20 to 19. Where the kernel groups by session, as sched(7)
 * says under "autogroup", the niceness of a thread only counts within its own: without this the threads of a worker would
 * take as much of a core as the pages. Where there are no such groups, or it may not be set, niceness is all there is.
 */
export function rankSession(pid, nice) {
  try {
    writeFileSync(`/proc/${pid}/autogroup`, String(nice));
  } catch {
    return;
  }
}

/**
 * One child that is started again with back-off when it dies. It leads its own process group, so that Ctrl-C reaches
 * us alone and we end our children in order.
 */
export class Supervised {
  #name;
  #state;
  #start;
  #patience;
  #nice;
  #child = null;
  #wanted = false;
  #backOff = 250;
  #timer = null;

  constructor({ name, state, command, args, env, cwd, patience = 10_000, nice = 0 }) {
    this.#name = name;
    this.#state = state;
    this.#patience = patience;
    this.#nice = nice;
    this.#start = { command, args, env, cwd };
  }

  get pid() {
    return this.#child?.pid ?? null;
  }

  start() {
    this.#wanted = true;
    this.#launch();
  }

  #launch() {
    const { command, args, env, cwd } = this.#start;
    const log = path.join(this.#state, 'log', `${this.#name}.log`);
    const output = openSync(log, 'a', 0o600);
    if (statSync(log).size > 50e6) truncateSync(log, 0);
    const begun = Date.now();
    const child = spawn(command, args, { env, cwd, detached: true, stdio: ['ignore', output, output] });
    this.#child = child;
    child.once('spawn', () => {
      if (this.#nice) rankSession(child.pid, this.#nice);
      const file = path.join(this.#state, 'pid', this.#name);
      // The command line stands only once the new program has replaced the fork.
      const record = () => writeFileSync(file, `${child.pid}\n${commandLine(child.pid)}`, { mode: 0o600 });
      record();
      setTimeout(() => this.#child === child && isAlive(child.pid) && record(), 500).unref();
    });
    const ended = (how) => {
      if (this.#child !== child) return;
      this.#child = null;
      if (!this.#wanted) return;
      if (Date.now() - begun > 30_000) this.#backOff = 250;
      say(`${this.#name} ended (${how}); starting it again in ${(this.#backOff / 1000).toFixed(2)} s`);
      this.#timer = setTimeout(() => this.#wanted && this.#launch(), this.#backOff);
      this.#backOff = Math.min(this.#backOff * 2, 10_000);
    };
    child.once('error', (error) => ended(error.message));
    child.once('exit', (code, by) => ended(by ?? `code ${code}`));
  }

  async stop() {
    this.#wanted = false;
    if (this.#timer) clearTimeout(this.#timer);
    const pid = this.pid;
    if (pid !== null) await end(pid, this.#patience);
    rmSync(path.join(this.#state, 'pid', this.#name), { force: true });
  }
}
