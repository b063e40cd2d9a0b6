import { spawn } from 'node:child_process';

/** Child processes that run to their end; all of them are ended when we are. */
const running = new Set();

export function endRunningCommands() {
  for (const child of running) {
    try {
      process.kill(-child.pid, 'SIGTERM');
    } catch {
      // It has ended between the look and the signal.
    }
  }
}

/**
 * Runs a command to its end. With `quiet` its output is kept and shown only if it fails.
 * Resolves to {code, output}; rejects where `check` is set (default) and the code isn't 0.
 */
export function run(command, args, { quiet = false, check = true, env = process.env, cwd, input } = {}) {
  return new Promise((resolve, reject) => {
    const stdin = input === undefined ? 'ignore' : 'pipe';
    const child = spawn(command, args, {
      cwd,
      env,
      detached: true,
      stdio: [stdin, quiet ? 'pipe' : 'inherit', quiet ? 'pipe' : 'inherit'],
    });
    running.add(child);
    const chunks = [];
    child.stdout?.on('data', (chunk) => chunks.push(chunk));
    child.stderr?.on('data', (chunk) => chunks.push(chunk));
    if (input !== undefined) child.stdin.end(input);
    child.on('error', (error) => {
      running.delete(child);
      reject(error);
    });
    child.on('close', (code, signal) => {
      running.delete(child);
      const output = Buffer.concat(chunks).toString('utf8');
      if (check && code !== 0) {
        reject(new Error(`${command} ${args[0] ?? ''} ended with ${signal ?? code}\n${output.slice(-4000)}`));
      } else {
        resolve({ code: code ?? 1, output });
      }
    });
  });
}
