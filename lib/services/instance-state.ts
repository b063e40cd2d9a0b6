import { QueryTypes } from 'sequelize';
import { database } from '@/lib/db';
import { livingWorkers } from '@/lib/jobs/heartbeat';
import { readFacts } from '@/lib/jobs/worker-facts';
import { mailAnswers } from '@/lib/mail/transport';
import { redis } from '@/lib/redis';
import {
  checkStatusSchema,
  fitStatusSchema,
  type InstanceState,
  type ServiceName,
  type ServiceState,
  type StorageState,
  type WorkerState,
} from '@/lib/schemas';
import { storage } from '@/storage';
import type { Administration } from './administration';
import { checkUnfinished } from './check-lease';
import { isUnfinished } from './fit-lease';
import { clockAt, isHeld } from './lease-sql';
import { within } from './health';

/** Most fits that are listed. */
const listed = 200;

async function timed(name: ServiceName, answer: Promise<unknown>): Promise<ServiceState> {
  const started = performance.now();
  const came = await within(answer.then(() => true));
  const milliseconds = Math.round((performance.now() - started) * 10) / 10;
  return came ? { name, state: 'ok', milliseconds } : { name, state: 'away', milliseconds: null };
}

interface QueuedRow {
  id: string;
  groupId: string;
  groupName: string;
  notebookId: string;
  number: number;
  status: string;
  held: number;
  since: Date;
}

/** Fits or checks that haven't ended: how many, how many of them are held, and the first of them. */
async function readQueued(table: 'fits' | 'checks', unfinished: string, since: string) {
  const held = `(${isHeld(clockAt())})`;
  const [[counts], rows] = await Promise.all([
    database().query<{ all: number; running: number }>(
      `SELECT COUNT(*) AS \`all\`, COALESCE(SUM(${held}), 0) AS running FROM ${table} f WHERE ${unfinished}`,
      { type: QueryTypes.SELECT },
    ),
    database().query<QueuedRow>(
      `SELECT f.id, f.group_id AS groupId, g.name AS groupName, f.notebook_id AS notebookId, f.number,
         f.status, ${held} AS held, ${since} AS since
       FROM ${table} f JOIN \`groups\` g ON g.id = f.group_id WHERE ${unfinished}
       ORDER BY held DESC, f.created_at, f.id LIMIT :listed`,
      { replacements: { listed }, type: QueryTypes.SELECT },
    ),
  ]);
  return { all: Number(counts.all), running: Number(counts.running), rows };
}

const queuedOf = ({ groupId, groupName, notebookId, number, held, since }: QueuedRow) => ({
  groupId,
  groupName,
  notebookId,
  number,
  held: Number(held) === 1,
  since: new Date(since).toISOString(),
});

async function readQueue(): Promise<InstanceState['queue']> {
  const [fits, checks] = await Promise.all([
    readQueued('fits', isUnfinished, 'COALESCE(f.started_at, f.created_at)'),
    readQueued('checks', checkUnfinished, 'f.queued_at'),
  ]);
  const running = fits.running + checks.running;
  return {
    waiting: fits.all + checks.all - running,
    running,
    fits: fits.rows.map((row) => ({
      ...queuedOf(row),
      fitId: row.id,
      status: fitStatusSchema.parse(row.status),
    })),
    checks: checks.rows.map((row) => ({
      ...queuedOf(row),
      checkId: row.id,
      status: checkStatusSchema.parse(row.status),
    })),
  };
}

async function readWorkers(): Promise<WorkerState[]> {
  const living = await livingWorkers();
  const workers = await Promise.all(
    living.map(async ({ workerId, silentFor }) => {
      const facts = await readFacts(workerId);
      const none = { host: null, pid: null, threads: null, fits: null, version: null, startedAt: null };
      return { id: workerId, ...(facts ?? none), silentFor };
    }),
  );
  // By beginning, so that rows stay in their places.
  return workers.sort(
    (a, b) => (a.startedAt ?? '').localeCompare(b.startedAt ?? '') || (a.id < b.id ? -1 : 1),
  );
}

/** Services with their latency, the queue by group and notebook, and the living workers. */
export async function readInstanceState(_: Administration, now = new Date()): Promise<InstanceState> {
  const [services, queue, workers] = await Promise.all([
    Promise.all([
      timed('database', database().authenticate()),
      timed('queue', redis().ping()),
      timed('storage', storage().ping()),
      timed('mail', mailAnswers()),
    ]),
    readQueue(),
    within(readWorkers()),
  ]);
  return { at: now.toISOString(), services, queue, workers };
}

/** How long a count of the objects holds: it asks the store for all of their names. */
const countedForMs = 60_000;
let counted: { at: number; objects: Promise<StorageState['objects']> } | undefined;

async function countObjects(): Promise<StorageState['objects']> {
  let count = 0;
  let bytes = 0;
  try {
    for await (const page of storage().list('')) {
      count += page.length;
      bytes += page.reduce((sum, object) => sum + object.bytes, 0);
    }
  } catch {
    return null;
  }
  return { count, bytes };
}

/** What tables and objects take up; objects are counted once a minute at most. */
export async function readStorageState(_: Administration, at = new Date()): Promise<StorageState> {
  const now = at.getTime();
  if (!counted || now - counted.at > countedForMs) counted = { at: now, objects: countObjects() };
  const [rows, objects] = await Promise.all([
    database().query<{ name: string; rows: number | string; bytes: number | string }>(
      `SELECT table_name AS name, COALESCE(table_rows, 0) AS \`rows\`,
         COALESCE(data_length, 0) + COALESCE(index_length, 0) AS bytes
       FROM information_schema.tables WHERE table_schema = DATABASE() ORDER BY bytes DESC, name`,
      { type: QueryTypes.SELECT },
    ),
    counted.objects,
  ]);
  // A store that was away is asked again at once.
  if (objects === null) counted = undefined;
  const tables = rows.map(({ name, ...sizes }) => ({
    name,
    rows: Number(sizes.rows),
    bytes: Number(sizes.bytes),
  }));
  return {
    at: at.toISOString(),
    tables,
    tableBytes: tables.reduce((sum, { bytes }) => sum + bytes, 0),
    objects,
  };
}
