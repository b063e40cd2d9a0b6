import { availableParallelism } from 'node:os';
import { z } from 'zod';

const count = z.coerce.number<string>().int().min(1);

/** How a worker process goes about its work; nothing here changes a draw. */
const settingsSchema = z.object({
  /** How long a fit is held without a sign of life, in milliseconds. */
  BEATNOTE_LEASE_MS: count.default(15_000),
  /** Milliseconds between two looks for fits that nobody holds. */
  BEATNOTE_RECONCILE_MS: count.default(5_000),
  /** Threads that sample one fit. */
  BEATNOTE_THREADS: count.default(availableParallelism()),
  /** Fits at the same time. */
  BEATNOTE_FITS: count.default(4),
});

export interface WorkerSettings {
  leaseMs: number;
  reconcileMs: number;
  threads: number;
  fits: number;
  /** How long a block may take to its end when the process is asked to stop. */
  graceMs: number;
}

export function readWorkerSettings(environment: Record<string, string | undefined>): WorkerSettings {
  const given = Object.fromEntries(Object.entries(environment).filter(([, value]) => value !== ''));
  const settings = settingsSchema.parse(given);
  return {
    leaseMs: settings.BEATNOTE_LEASE_MS,
    reconcileMs: settings.BEATNOTE_RECONCILE_MS,
    threads: settings.BEATNOTE_THREADS,
    fits: settings.BEATNOTE_FITS,
    graceMs: 10_000,
  };
}
