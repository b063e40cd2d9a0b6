import { randomUUID } from 'node:crypto';
import { hostname } from 'node:os';
import { Worker } from 'bullmq';
import { config } from '@/lib/config';
import { closeDatabase, database } from '@/lib/db';
import {
  beat,
  closeQueue,
  endBeat,
  enqueueScan,
  fitsQueue,
  fitWorkerOptions,
  scanJobSchema,
  scansQueue,
} from '@/lib/jobs';
import { tellFacts } from '@/lib/jobs/worker-facts';
import { log } from '@/lib/log';
import { closeRedis, queueConnection } from '@/lib/redis';
import { sendDueMails } from '@/lib/services/fit-mails';
import { takeNext } from '@/lib/services/fit-queue';
import { unheldScans } from '@/lib/services/scan-lease';
import { deleteStrayFiles } from '@/lib/services/stray-files';
import { closeStorage } from '@/storage';
import packageFile from '@/package.json';
import { runCheck } from './check-run';
import { runFit } from './fit-run';
import { runScanJob } from './scan-run';
import { every } from './every';
import { reasonOf } from './retry';
import { readWorkerSettings } from './settings';
import { Taker } from './taker';

/** The entry of a worker process. The main thread does I/O only: whatever computes is in threads, or leases would run out. */
config();
database();
const settings = readWorkerSettings(process.env);
const workerId = randomUUID();
const gently = new AbortController();
const now = new AbortController();
const connection = queueConnection();

const taker = new Taker({
  places: settings.fits,
  stepBack: 100,
  take: () => takeNext(settings.leaseMs),
  run: (taken) => {
    const stopping = { gently: gently.signal, now: now.signal };
    const run =
      taken.kind === 'fit' ? runFit(taken, settings, stopping) : runCheck(taken, settings, stopping);
    return run.catch((error: unknown) =>
      log.error({ ...taken, ...reasonOf(error) }, `a ${taken.kind} was let go`),
    );
  },
  // A call that wakes one worker is to reach one that has a place.
  onFull: (full) => {
    if (full) void worker.pause(true);
    else worker.resume();
  },
});

/** A job wakes this worker, and says no more: whose turn it is stands in the database. */
const worker = new Worker(fitsQueue, () => taker.fill(), { connection, ...fitWorkerOptions });
worker.on('error', (error) => log.debug({ err: error }, 'the queue'));
worker.on('failed', (job, error) => log.warn({ jobId: job?.id, ...reasonOf(error) }, 'a job failed'));

/** Scans take seconds, so one at a time is enough; fits don't wait for them. */
const scanConnection = queueConnection();
const scanner = new Worker(
  scansQueue,
  async (job) => runScanJob(scanJobSchema.parse(job.data).scanId, settings, now.signal),
  { connection: scanConnection, concurrency: 1, ...fitWorkerOptions },
);
scanner.on('error', (error) => log.debug({ err: error }, 'the queue of scans'));
scanner.on('failed', (job, error) => log.warn({ jobId: job?.id, ...reasonOf(error) }, 'a job failed'));

const heartbeat = every(5_000, () => beat(workerId, settings.fits), 'the sign of life');

const facts = {
  host: hostname(),
  pid: process.pid,
  threads: settings.threads,
  fits: settings.fits,
  version: packageFile.version,
  startedAt: new Date().toISOString(),
};
const telling = every(5_000, () => tellFacts(workerId, facts), 'telling of itself');

/** Redis may be away or have lost its jobs, or a process died between commit and queueing: what waits is looked for anyway. */
const reconciler = every(settings.reconcileMs, () => taker.fill(), 'the search for fits that wait');
const scanReconciler = every(
  settings.reconcileMs,
  async () => {
    for (const { id, epoch } of await unheldScans()) await enqueueScan(id, epoch);
  },
  'the search for scans that nobody holds',
);

/** The end of a fit is told after it was committed, by whoever finds that it is due. */
const postman = every(
  settings.reconcileMs,
  async () => void (await sendDueMails()),
  'the search for mails that are due',
);

/** A process that was killed within an upload leaves files that no row names. */
const sweeper = every(
  10 * 60_000,
  async () => void (await deleteStrayFiles(new Date())),
  'the search for files that no measurement names',
);

async function close(): Promise<void> {
  heartbeat();
  telling();
  reconciler();
  scanReconciler();
  postman();
  sweeper();
  const patience = setTimeout(() => now.abort(), settings.graceMs);
  // Takes no fit any more and waits for those that it has.
  await Promise.all([
    worker.close().catch((error: unknown) => log.warn({ err: error }, 'the queue did not close')),
    scanner.close().catch((error: unknown) => log.warn({ err: error }, 'the queue of scans did not close')),
    taker.close(),
  ]);
  clearTimeout(patience);
  await endBeat(workerId).catch(() => undefined);
  await closeQueue();
  connection.disconnect();
  scanConnection.disconnect();
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
