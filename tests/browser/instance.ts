import { execFileSync, spawn, type ChildProcess } from 'node:child_process';
import { mkdtempSync, readFileSync, readdirSync, rmSync } from 'node:fs';
import { tmpdir } from 'node:os';
import net from 'node:net';
import path from 'node:path';

/** A whole Beatnote as `npm start` brings it up, in a state folder of its own. */
export interface RunningInstance {
  url: string;
  state: string;
  /** One-time sign-in links by e-mail address, as the terminal printed them. */
  links: Record<string, string>;
  /** Seconds from the command to the line that says it is ready. */
  secondsToReady: number;
}

const root = path.resolve(import.meta.dirname, '../..');

/** Sign-in links by address, as `npm start` prints them. */
export const linksIn = (printed: string): Record<string, string> =>
  Object.fromEntries(
    [...printed.matchAll(/(\S+@demo\.beatnote\.example)\s+(http\S+)/g)].map((match) => [match[1], match[2]]),
  );

/** New one-time links into a running instance: those that its terminal printed serve one test file each at most. */
export function freshLinks(state: string): Record<string, string> {
  const environment = JSON.parse(readFileSync(path.join(state, 'instance.json'), 'utf8')) as Record<
    string,
    string
  >;
  const printed = execFileSync(process.execPath, ['--import', 'tsx', 'scripts/sign-in-links.ts'], {
    cwd: root,
    env: { ...process.env, ...environment },
    encoding: 'utf8',
  });
  return linksIn(printed);
}

export function freePort(): Promise<number> {
  return new Promise((resolve, reject) => {
    const server = net.createServer();
    server.once('error', reject);
    server.listen(0, '127.0.0.1', () => {
      const address = server.address() as net.AddressInfo;
      server.close(() => resolve(address.port));
    });
  });
}

/** Command lines of living processes that name the folder; zombies have none. */
export function processesNaming(folder: string): string[] {
  return readdirSync('/proc')
    .filter((name) => /^\d+$/.test(name) && Number(name) !== process.pid)
    .flatMap((pid) => {
      try {
        const environment = readFileSync(`/proc/${pid}/environ`, 'utf8');
        const command = readFileSync(`/proc/${pid}/cmdline`, 'utf8').replaceAll('\0', ' ').trim();
        return command && (command.includes(folder) || environment.includes(folder)) ? [command] : [];
      } catch {
        return [];
      }
    });
}

export class StartedInstance {
  private constructor(
    private readonly child: ChildProcess,
    readonly facts: RunningInstance,
    readonly printed: () => string,
  ) {}

  static async start(state = mkdtempSync(path.join(tmpdir(), 'beatnote-test-'))): Promise<StartedInstance> {
    const port = await freePort();
    const begun = Date.now();
    const services = ['DATABASE_URL', 'REDIS_URL', 'S3_ENDPOINT', 'SMTP_URL'];
    const environment = Object.fromEntries(
      Object.entries(process.env).filter(([name]) => !services.includes(name)),
    );
    const child = spawn('npm', ['start'], {
      cwd: root,
      env: { ...environment, PORT: String(port), BEATNOTE_STATE: state } as unknown as NodeJS.ProcessEnv,
      stdio: ['ignore', 'pipe', 'pipe'],
      detached: true,
    });
    let printed = '';
    child.stdout.on('data', (chunk: Buffer) => (printed += chunk.toString()));
    child.stderr.on('data', (chunk: Buffer) => (printed += chunk.toString()));
    await new Promise<void>((resolve, reject) => {
      const look = setInterval(() => {
        if (!printed.includes('Ctrl-C stops everything.')) return;
        clearInterval(look);
        resolve();
      }, 50);
      child.once('exit', (code) => {
        clearInterval(look);
        reject(new Error(`npm start ended with ${code} before it was ready:\n${printed}`));
      });
    });
    const facts = {
      url: `http://127.0.0.1:${port}`,
      state,
      links: linksIn(printed),
      secondsToReady: (Date.now() - begun) / 1000,
    };
    return new StartedInstance(child, facts, () => printed);
  }

  /** Sends TERM to npm alone, as a service manager does, and waits until it has ended. */
  async stop(): Promise<void> {
    if (this.child.exitCode !== null) return;
    const ended = new Promise((resolve) => this.child.once('exit', resolve));
    process.kill(this.child.pid!, 'SIGTERM');
    await ended;
  }

  removeState(): void {
    rmSync(this.facts.state, { recursive: true, force: true });
  }
}
