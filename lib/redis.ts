import { Redis, type RedisOptions } from 'ioredis';
import { config } from '@/lib/config';
import { log } from '@/lib/log';

interface Connections {
  shared?: Redis;
  subscriber?: Redis;
  listeners: Map<string, Set<(message: string) => void>>;
}

/** Hot reloading evaluates modules anew; connections have to outlive that. */
const holder = globalThis as typeof globalThis & { beatnoteRedis?: Connections };
const connections = (): Connections => (holder.beatnoteRedis ??= { listeners: new Map() });

function connect(purpose: string, options: RedisOptions): Redis {
  const redis = new Redis(config().redisUrl, { connectionName: `beatnote-${purpose}`, ...options });
  let away = false;
  redis.on('error', (error) => {
    // One line when it goes, not one for every attempt to come back.
    if (!away) log.warn({ purpose, err: error }, 'Redis is away');
    away = true;
  });
  redis.on('ready', () => {
    away = false;
  });
  return redis;
}

/** For counters, leases and publishing; a command fails soon when Redis is away instead of waiting for it. */
export function redis(): Redis {
  return (connections().shared ??= connect('shared', { maxRetriesPerRequest: 1, connectTimeout: 2000 }));
}

/** A new connection for BullMQ, which insists on waiting for ever. The caller closes it. */
export function queueConnection(): Redis {
  return connect('queue', { maxRetriesPerRequest: null });
}

/** Listens on a channel over the one subscriber of the process; returns how to stop listening. */
export async function subscribe(channel: string, listener: (message: string) => void): Promise<() => void> {
  const own = connections();
  if (!own.subscriber) {
    own.subscriber = connect('subscriber', { maxRetriesPerRequest: null });
    own.subscriber.on('message', (from: string, message: string) => {
      for (const each of own.listeners.get(from) ?? []) each(message);
    });
  }
  const subscriber = own.subscriber;
  const listeners = own.listeners.get(channel) ?? new Set();
  own.listeners.set(channel, listeners);
  listeners.add(listener);
  if (listeners.size === 1) await subscriber.subscribe(channel);
  return () => {
    listeners.delete(listener);
    if (listeners.size > 0 || own.listeners.get(channel) !== listeners) return;
    own.listeners.delete(channel);
    subscriber
      .unsubscribe(channel)
      .catch((error: unknown) => log.warn({ err: error }, 'unsubscribing failed'));
  };
}

export async function closeRedis(): Promise<void> {
  const { shared, subscriber } = connections();
  holder.beatnoteRedis = undefined;
  shared?.disconnect();
  subscriber?.disconnect();
}
