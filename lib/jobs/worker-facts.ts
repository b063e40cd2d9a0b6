import { z } from 'zod';
import { redis } from '@/lib/redis';

/** What a worker says of itself, beside its sign of life; kept somewhat longer than that, so that it never lacks. */
const prefix = 'facts:worker:';
const lifetime = 60;

const factsSchema = z.object({
  host: z.string(),
  pid: z.number().int(),
  /** Threads that sample one fit, and fits at the same time. */
  threads: z.number().int(),
  fits: z.number().int(),
  version: z.string(),
  startedAt: z.iso.datetime(),
});
export type WorkerFacts = z.infer<typeof factsSchema>;

/** To be repeated with the sign of life. */
export async function tellFacts(workerId: string, facts: WorkerFacts): Promise<void> {
  await redis().set(`${prefix}${workerId}`, JSON.stringify(facts), 'EX', lifetime);
}

/** What the worker has said of itself; null where it is unknown or of another program's form. */
export async function readFacts(workerId: string): Promise<WorkerFacts | null> {
  const told = await redis().get(`${prefix}${workerId}`);
  if (told === null) return null;
  const parsed = factsSchema.safeParse(JSON.parse(told));
  return parsed.success ? parsed.data : null;
}
