import { readFileSync, readdirSync } from 'node:fs';
import path from 'node:path';

/** Ticks of the kernel's accounting in a second: fixed at 100 on Linux for whoever reads /proc. */
const ticksPerSecond = 100;

interface Process {
  parent: number;
  milliseconds: number;
}

/** User and system time of a process with all its threads; null where it has ended. */
function readProcess(pid: number): Process | null {
  try {
    const stat = readFileSync(`/proc/${pid}/stat`, 'utf8');
    // The name, in parentheses, may hold anything; what follows it doesn't.
    const fields = stat.slice(stat.lastIndexOf(')') + 2).split(' ');
    const ticks = Number(fields[11]) + Number(fields[12]);
    return { parent: Number(fields[1]), milliseconds: (1000 * ticks) / ticksPerSecond };
  } catch {
    return null;
  }
}

/** A reader of the milliseconds of processor time that the web server of an instance and its children have used. */
export function webCpuReader(state: string): () => number {
  const pid = Number(readFileSync(path.join(state, 'pid', 'web'), 'utf8').split('\n')[0]);
  if (!readProcess(pid))
    throw new Error('The web server of this instance runs on another machine, or has ended.');
  return () => {
    const all = new Map<number, Process>();
    for (const name of readdirSync('/proc')) {
      const each = /^\d+$/.test(name) ? readProcess(Number(name)) : null;
      if (each) all.set(Number(name), each);
    }
    const isOurs = (id: number): boolean => {
      for (let at = id; at > 1; at = all.get(at)?.parent ?? 0) if (at === pid) return true;
      return false;
    };
    return [...all].reduce((sum, [id, { milliseconds }]) => sum + (isOurs(id) ? milliseconds : 0), 0);
  };
}
