import { redis } from '@/lib/redis';

/** Every live worker keeps one key alive; a worker that is killed is gone when its key runs out. */
const prefix = 'worker:';
const lifetime = 15;

/** Says that a worker lives; to be repeated every five seconds. */
export async function beat(workerId: string): Promise<void> {
  await redis().set(`${prefix}${workerId}`, '1', 'EX', lifetime);
}

/** Takes the sign of life away at an orderly end. */
export async function endBeat(workerId: string): Promise<void> {
  await redis().del(`${prefix}${workerId}`);
}

/** Number of worker processes that are alive. */
export async function liveWorkers(): Promise<number> {
  let cursor = '0';
  const found = new Set<string>();
  do {
    const [next, keys] = await redis().scan(cursor, 'MATCH', `${prefix}*`, 'COUNT', 1000);
    keys.forEach((key) => found.add(key));
    cursor = next;
  } while (cursor !== '0');
  return found.size;
}
