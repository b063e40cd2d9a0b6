import { constants, setPriority } from 'node:os';

/**
 * Lets pages, database and leases go first: a thread that computes takes what they leave. On Linux the priority is the calling
 * thread's own, so the process's main thread keeps its place. Where it can't be set, the thread computes all the same.
 */
export function yieldToOthers(): void {
  try {
    setPriority(0, constants.priority.PRIORITY_LOW);
  } catch {
    return;
  }
}
