import { database } from '@/lib/db';
import { liveWorkers } from '@/lib/jobs/heartbeat';
import { redis } from '@/lib/redis';
import type { Health } from '@/lib/schemas';
import { storage } from '@/storage';
import packageFile from '@/package.json';

/** How long one service may take to say that it is there. */
const patience = 2_000;

/** The answer, or null where it is late or fails. */
export async function within<T>(answer: Promise<T>): Promise<T | null> {
  let timer: NodeJS.Timeout | undefined;
  const late = new Promise<null>((resolve) => {
    timer = setTimeout(() => resolve(null), patience);
  });
  try {
    return await Promise.race([answer, late]);
  } catch {
    return null;
  } finally {
    clearTimeout(timer);
  }
}

/** Asks every service whether it answers. No worker doesn't make an instance unwell: fits wait, and say so. */
export async function readHealth(): Promise<Health> {
  const [databaseAnswer, queueAnswer, storageAnswer, workers] = await Promise.all([
    within(
      database()
        .authenticate()
        .then(() => true),
    ),
    within(redis().ping()),
    within(
      storage()
        .ping()
        .then(() => true),
    ),
    within(liveWorkers()),
  ]);
  const state = (answer: unknown) => (answer === null ? 'away' : 'ok');
  const parts = {
    database: state(databaseAnswer),
    queue: state(queueAnswer),
    storage: state(storageAnswer),
  } as const;
  const well = Object.values(parts).every((part) => part === 'ok');
  return { status: well ? 'ok' : 'degraded', ...parts, workers: workers ?? 0, version: packageFile.version };
}
