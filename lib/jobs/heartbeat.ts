import { redis } from '@/lib/redis';

/** Every live worker keeps one key alive; a worker that is killed is gone when its key runs out. */
const prefix = 'worker:';
const lifetime = 15;

/** Says that a worker lives and how many fits it takes at once; to be repeated every five seconds. */
export async function beat(workerId: string, places: number): Promise<void> {
  await redis().set(`${prefix}${workerId}`, String(places), 'EX', lifetime);
}

/** Takes the sign of life away at an orderly end. */
export async function endBeat(workerId: string): Promise<void> {
  await redis().del(`${prefix}${workerId}`);
}

async function beatKeys(): Promise<string[]> {
  let cursor = '0';
  const found = new Set<string>();
  do {
    const [next, keys] = await redis().scan(cursor, 'MATCH', `${prefix}*`, 'COUNT', 1000);
    keys.forEach((key) => found.add(key));
    cursor = next;
  } while (cursor !== '0');
  return [...found];
}

/** Number of worker processes that are alive. */
export const liveWorkers = async (): Promise<number> => (await beatKeys()).length;

/** Fits that all living workers together take at once. */
export async function workerPlaces(): Promise<number> {
  const keys = await beatKeys();
  const values = keys.length > 0 ? await redis().mget(keys) : [];
  return values.reduce((sum, value) => sum + Number(value ?? 0), 0);
}

/** The living workers, with the seconds since each one's last sign of life. */
export async function livingWorkers(): Promise<{ workerId: string; silentFor: number }[]> {
  const keys = await beatKeys();
  const left = await Promise.all(keys.map((key) => redis().pttl(key)));
  return keys.flatMap((key, i) =>
    left[i] < 0 ? [] : [{ workerId: key.slice(prefix.length), silentFor: lifetime - left[i] / 1000 }],
  );
}
