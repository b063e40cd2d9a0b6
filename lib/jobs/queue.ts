import { Queue } from 'bullmq';
import { queueConnection } from '@/lib/redis';
import {
  checkJobId,
  checkJobSchema,
  fitJobId,
  fitJobOptions,
  fitJobSchema,
  fitsQueue,
  type CheckJob,
  type FitJob,
} from './fits';
import { scanJobId, scanJobSchema, scansQueue, type ScanJob } from './scans';

type Job = FitJob | CheckJob | ScanJob;

interface OpenQueue {
  queue: Queue<Job>;
  connection: ReturnType<typeof queueConnection>;
}

/** Hot reloading evaluates modules anew; connections have to outlive that. */
const holder = globalThis as typeof globalThis & { beatnoteQueues?: Map<string, OpenQueue> };

function open(name: string): Queue<Job> {
  const queues = (holder.beatnoteQueues ??= new Map<string, OpenQueue>());
  let found = queues.get(name);
  if (!found) {
    const connection = queueConnection();
    const queue = new Queue<Job>(name, { connection });
    // The connection itself says when Redis is away.
    queue.on('error', () => undefined);
    found = { queue, connection };
    queues.set(name, found);
  }
  return found.queue;
}

/** How long a request waits for a queue that doesn't answer; the reconciler queues what was left. */
const patience = 1_500;

async function enqueue(name: string, job: string, payload: Job, jobId: string): Promise<void> {
  let timer: NodeJS.Timeout | undefined;
  const late = new Promise<never>((_, reject) => {
    timer = setTimeout(() => reject(new Error('The queue took too long.')), patience);
  });
  try {
    const adding = open(name).add(job, payload, { ...fitJobOptions, jobId });
    adding.catch(() => undefined);
    await Promise.race([adding, late]);
  } finally {
    clearTimeout(timer);
  }
}

/** Wakes a worker for a fit at this epoch. Rejects when the queue doesn't answer in time. */
export const enqueueFit = (fitId: string, epoch: number): Promise<void> =>
  enqueue(fitsQueue, 'fit', fitJobSchema.parse({ fitId }), fitJobId(fitId, epoch));

/** The same for a check. */
export const enqueueCheck = (checkId: string, epoch: number): Promise<void> =>
  enqueue(fitsQueue, 'check', checkJobSchema.parse({ checkId }), checkJobId(checkId, epoch));

/** The same for a scan. */
export const enqueueScan = (scanId: string, epoch: number): Promise<void> =>
  enqueue(scansQueue, 'scan', scanJobSchema.parse({ scanId }), scanJobId(scanId, epoch));

export async function closeQueue(): Promise<void> {
  const queues = [...(holder.beatnoteQueues?.values() ?? [])];
  holder.beatnoteQueues = undefined;
  for (const { queue, connection } of queues) {
    await queue.close().catch(() => undefined);
    connection.disconnect();
  }
}
