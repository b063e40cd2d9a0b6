import { z } from 'zod';

/** The queue that wakes workers up. MariaDB is the truth: a job says which fit to look at and nothing else. */
export const fitsQueue = 'fits';

export const fitJobSchema = z.object({ fitId: z.uuid() });
export type FitJob = z.infer<typeof fitJobSchema>;

/**
 * One job for each lease of a fit: the epoch before it is taken. An id that is queued already is ignored by the queue,
 * which is what keeps the reconciler from queueing a fit twice.
 */
export const fitJobId = (fitId: string, epoch: number): string => `fit-${fitId}-${epoch}`;

/** A job that ended is of no more use, and its id has to be free again. */
export const fitJobOptions = {
  attempts: 3,
  backoff: { type: 'exponential', delay: 1_000 },
  removeOnComplete: true,
  removeOnFail: true,
} as const;

/** A worker that dies loses its jobs after the lock; being taken up again may happen any number of times. */
export const fitWorkerOptions = {
  lockDuration: 10_000,
  stalledInterval: 5_000,
  maxStalledCount: 1_000,
} as const;

/** A check of a posterior waits in the same queue: either job wakes a worker, and whose turn it is stands in the database. */
export const checkJobSchema = z.object({ checkId: z.uuid() });
export type CheckJob = z.infer<typeof checkJobSchema>;

export const checkJobId = (checkId: string, epoch: number): string => `check-${checkId}-${epoch}`;

/** Channel on which every commit of a fit is told. */
export const fitChannel = (fitId: string): string => `fit:${fitId}`;
