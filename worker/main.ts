import { randomUUID } from 'node:crypto';
import { Worker } from 'bullmq';
import { config } from '@/lib/config';
import { closeDatabase, database } from '@/lib/db';
import { beat, closeQueue, endBeat, enqueueFit, fitJobSchema, fitsQueue, fitWorkerOptions } from '@/lib/jobs';
import { log } from '@/lib/log';
import { closeRedis, queueConnection } from '@/lib/redis';
import { unheldFits } from '@/lib/services/fit-lease';
import { deleteStrayFiles } from '@/lib/services/stray-files';
import { closeStorage } from '@/storage';
import { runFit } from './fit-run';
import { every } from './every';
import { readWorkerSettings } from './settings';

/** The entry of a worker process. The main thread does I/O only: whatever computes is in threads, or leases would run out. */
config();
database();
const settings = readWorkerSettings(process.env);
const workerId = randomUUID();
const gently = new AbortController();
const now = new AbortController();
const connection = queueConnection();

const worker = new Worker(
  fitsQueue,
  async (job) => {
    const { fitId } = fitJobSchema.parse(job.data);
    await runFit(fitId, settings, { gently: gently.signal, now: now.signal });
  },
  { connection, concurrency: settings.fits, ...fitWorkerOptions },
);
worker.on('error', (error) => log.debug({ err: error }, 'the queue'));
worker.on('failed', (job, error) => log.error({ jobId: job?.id, err: error }, 'a job failed'));

const heartbeat = every(5_000, () => beat(workerId), 'the sign of life');

/** Redis may have lost its jobs, or a process died between commit and queueing: what nobody holds is queued again. */
const reconciler = every(
  settings.reconcileMs,
  async () => {
    for (const { id, epoch } of await unheldFits()) await enqueueFit(id, epoch);
  },
  'the search for fits that nobody holds',
);

/** A process that was killed within an upload leaves files that no row names. */
const sweeper = every(
  10 * 60_000,
  async () => void (await deleteStrayFiles(new Date())),
  'the search for files that no measurement names',
);

async function close(): Promise<void> {
  heartbeat();
  reconciler();
  sweeper();
  const patience = setTimeout(() => now.abort(), settings.graceMs);
  // Takes no job any more and waits for those that it has.
  await worker.close().catch((error: unknown) => log.warn({ err: error }, 'the queue did not close'));
  clearTimeout(patience);
  await endBeat(workerId).catch(() => undefined);
  await closeQueue();
  connection.disconnect();
  await closeRedis();
  await closeDatabase();
  closeStorage();
  log.info({ workerId }, 'worker stopped');
}

function onSignal(): void {
  if (gently.signal.aborted) {
    now.abort();
    return;
  }
  log.info({ workerId }, 'worker stops at the end of its blocks');
  gently.abort();
  // A service that is away mustn't keep the process for ever; the leases run out.
  setTimeout(() => process.exit(1), settings.graceMs + 3_000).unref();
  void close().then(() => process.exit(0));
}

process.on('SIGTERM', onSignal);
process.on('SIGINT', onSignal);
log.info({ workerId, ...settings }, 'worker ready');
