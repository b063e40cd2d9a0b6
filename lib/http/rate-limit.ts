import { AppError } from '@/lib/errors';
import { log } from '@/lib/log';
import { redis } from '@/lib/redis';

/** A bucket holds at most `burst` and gains `perSecond`; a request takes one. */
export interface Bucket {
  perSecond: number;
  burst: number;
}

/** Above what the interface promises: 20 requests a second and 300 uploads an hour a token. */
export const buckets = {
  request: { perSecond: 40, burst: 200 },
  upload: { perSecond: 600 / 3600, burst: 300 },
  /** Mails of one invitation that are sent again. */
  invitation: { perSecond: 5 / 3600, burst: 5 },
  /** Mailed links for one address. */
  link: { perSecond: 10 / 3600, burst: 10 },
} as const satisfies Record<string, Bucket>;

/** Atomic in Redis, by its clock: returns 0, or the milliseconds until one may be taken. */
const script = `
local now = redis.call('TIME')
local ms = now[1] * 1000 + math.floor(now[2] / 1000)
local rate = tonumber(ARGV[1]) / 1000
local burst = tonumber(ARGV[2])
local held = redis.call('HMGET', KEYS[1], 'level', 'at')
local level = burst
if held[1] then level = math.min(burst, tonumber(held[1]) + (ms - tonumber(held[2])) * rate) end
local wait = 0
if level >= 1 then level = level - 1 else wait = math.ceil((1 - level) / rate) end
redis.call('HSET', KEYS[1], 'level', tostring(level), 'at', ms)
redis.call('PEXPIRE', KEYS[1], math.ceil(burst / rate) + 1000)
return wait`;

/** How long a request may be held up by a Redis that doesn't answer. */
const patience = 300;

async function take(key: string, bucket: Bucket): Promise<number> {
  let timer: NodeJS.Timeout | undefined;
  const late = new Promise<never>((_, reject) => {
    timer = setTimeout(() => reject(new Error('Redis took too long')), patience);
  });
  try {
    const wait = redis().eval(script, 1, key, bucket.perSecond, bucket.burst);
    return Number(await Promise.race([wait, late]));
  } finally {
    clearTimeout(timer);
  }
}

/** Takes one from a bucket, or throws `too_many_requests`. Lets through while Redis is away: it guards, it isn't needed. */
export async function limitRate(kind: keyof typeof buckets, who: string): Promise<void> {
  let wait = 0;
  try {
    wait = await take(`rate:${kind}:${who}`, buckets[kind]);
  } catch (error) {
    log.debug({ err: error }, 'rate limit not counted');
  }
  if (wait > 0) {
    const seconds = Math.ceil(wait / 1000);
    throw new AppError(
      'too_many_requests',
      `Too many requests. Try again in ${seconds} second${seconds === 1 ? '' : 's'}.`,
    );
  }
}
