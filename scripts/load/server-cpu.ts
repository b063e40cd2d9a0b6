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

/** What of an instance uses the processors, by the file that holds its process's number. */
const parts = { web: 'web', workers: 'worker', database: 'mariadb', redis: 'redis' } as const;
export type Part = keyof typeof parts;

export const partNames = Object.keys(parts) as Part[];

function pidOf(state: string, part: Part): number | null {
  try {
    return Number(readFileSync(path.join(state, 'pid', parts[part]), 'utf8').split('\n')[0]);
  } catch {
    // The environment gave the instance a service that runs elsewhere.
    return null;
  }
}

/**
 * A reader of the milliseconds of processor time that the parts of an instance and their children have used; a part that runs
 * elsewhere uses none here.
 */
export function cpuReader(state: string): () => Record<Part, number> {
  const pids = new Map(partNames.map((part) => [part, pidOf(state, part)]));
  const web = pids.get('web');
  if (!web || !readProcess(web))
    throw new Error('The web server of this instance runs on another machine, or has ended.');
  return () => {
    const all = new Map<number, Process>();
    for (const name of readdirSync('/proc')) {
      const each = /^\d+$/.test(name) ? readProcess(Number(name)) : null;
      if (each) all.set(Number(name), each);
    }
    const partOf = (id: number): Part | undefined => {
      for (let at = id; at > 1; at = all.get(at)?.parent ?? 0) {
        const part = partNames.find((each) => pids.get(each) === at);
        if (part) return part;
      }
      return undefined;
    };
    const used: Record<Part, number> = { web: 0, workers: 0, database: 0, redis: 0 };
    for (const [id, { milliseconds }] of all) {
      const part = partOf(id);
      if (part) used[part] += milliseconds;
    }
    return used;
  };
}
