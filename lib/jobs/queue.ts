import { Queue } from 'bullmq';
import { queueConnection } from '@/lib/redis';
import { fitJobId, fitJobOptions, fitJobSchema, fitsQueue, type FitJob } from './fits';

interface OpenQueue {
  queue: Queue<FitJob>;
  connection: ReturnType<typeof queueConnection>;
}

/** Hot reloading evaluates modules anew; connections have to outlive that. */
const holder = globalThis as typeof globalThis & { beatnoteQueue?: OpenQueue };

function fits(): OpenQueue {
  if (!holder.beatnoteQueue) {
    const connection = queueConnection();
    const queue = new Queue<FitJob>(fitsQueue, { connection });
    // The connection itself says when Redis is away.
    queue.on('error', () => undefined);
    holder.beatnoteQueue = { queue, connection };
  }
  return holder.beatnoteQueue;
}

/** How long a request waits for a queue that doesn't answer; the reconciler queues what was left. */
const patience = 1_500;

/** Wakes a worker for a fit at this epoch. Rejects when the queue doesn't answer in time. */
export async function enqueueFit(fitId: string, epoch: number): Promise<void> {
  const payload = fitJobSchema.parse({ fitId });
  let timer: NodeJS.Timeout | undefined;
  const late = new Promise<never>((_, reject) => {
    timer = setTimeout(() => reject(new Error('The queue took too long.')), patience);
  });
  try {
    const adding = fits().queue.add('fit', payload, { ...fitJobOptions, jobId: fitJobId(fitId, epoch) });
    adding.catch(() => undefined);
    await Promise.race([adding, late]);
  } finally {
    clearTimeout(timer);
  }
}

export async function closeQueue(): Promise<void> {
  const open = holder.beatnoteQueue;
  holder.beatnoteQueue = undefined;
  if (!open) return;
  await open.queue.close().catch(() => undefined);
  open.connection.disconnect();
}
