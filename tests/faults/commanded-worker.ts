import { spawn, type ChildProcess } from 'node:child_process';
import { once } from 'node:events';
import { createInterface } from 'node:readline';
import { fileURLToPath } from 'node:url';
import { z } from 'zod';

const root = fileURLToPath(new URL('../../', import.meta.url));
const saidSchema = z.object({ msg: z.string(), fitId: z.string().optional() });

/** A worker that was started by `npm run worker`, and what its log says of the fits that it holds. */
export class CommandedWorker {
  private static readonly running = new Set<CommandedWorker>();
  private readonly held = new Set<string>();
  private readonly exit: Promise<unknown>;

  private constructor(private readonly child: ChildProcess) {
    this.exit = once(child, 'exit');
  }

  /** Settles when the worker has said that it is ready. */
  static async start(environment: Record<string, string>): Promise<CommandedWorker> {
    const child = spawn('npm', ['run', 'worker'], {
      cwd: root,
      env: { ...process.env, LOG_LEVEL: 'info', ...environment },
      stdio: ['ignore', 'pipe', 'inherit'],
      // A group of its own, so that a failing test leaves none of npm, script and worker behind.
      detached: true,
    });
    const worker = new CommandedWorker(child);
    CommandedWorker.running.add(worker);
    await new Promise<void>((resolve, reject) => {
      child.once('exit', (code) => reject(new Error(`npm run worker ended with ${code}.`)));
      createInterface({ input: child.stdout! }).on('line', (line) => {
        const said = saidSchema.safeParse(line.startsWith('{') ? JSON.parse(line) : null).data;
        if (said?.msg === 'worker ready') resolve();
        if (said?.msg === 'sampling' && said.fitId !== undefined) worker.held.add(said.fitId);
      });
    });
    return worker;
  }

  /** Ids of the fits that it has begun to sample. */
  get fits(): ReadonlySet<string> {
    return this.held;
  }

  /** TERM to npm alone, as a service manager sends it. */
  async stop(): Promise<void> {
    this.child.kill('SIGTERM');
    await this.exit;
    CommandedWorker.running.delete(this);
  }

  /** For `afterAll`. */
  static endAll(): void {
    for (const { child } of CommandedWorker.running) {
      if (child.exitCode === null && child.signalCode === null) process.kill(-child.pid!, 'SIGKILL');
    }
    CommandedWorker.running.clear();
  }
}
