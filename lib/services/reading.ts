import { AsyncLocalStorage } from 'node:async_hooks';

/** What was read for one answer so far, by what it is. */
export type Reading = Map<string, Promise<unknown>>;

const readings = new AsyncLocalStorage<Reading>();

/**
 * Runs `act` as a part of one answer that is put together of several reads, as a page is: what more than one of its parts
 * needs is read once, and is the same in all of them.
 */
export const within = <T>(reading: Reading, act: () => Promise<T>): Promise<T> => readings.run(reading, act);

/** Reads what `key` names, once within a reading; outside of one, and in a transaction, each time anew. */
export function readOnce<T>(key: string, act: () => Promise<T>): Promise<T> {
  const reading = readings.getStore();
  if (!reading) return act();
  const known = reading.get(key) as Promise<T> | undefined;
  if (known) return known;
  const made = act();
  reading.set(key, made);
  return made;
}
