import { setTimeout as sleep } from 'node:timers/promises';
import { BaseError, ConnectionError, DatabaseError, TimeoutError } from 'sequelize';
import { log } from '@/lib/log';

/** Deadlock and lock wait timeout: the transaction was rolled back and may be tried again. */
const rolledBack = new Set([1205, 1213]);

/** Whether trying again may help: the database is away, the connection broke, or another transaction was in the way. */
export function isPassing(error: unknown): boolean {
  if (error instanceof ConnectionError || error instanceof TimeoutError) return true;
  if (!(error instanceof BaseError) && !(error instanceof Error)) return false;
  const { parent } = error as { parent?: { fatal?: boolean; errno?: number } };
  const cause = parent ?? (error as { fatal?: boolean; errno?: number });
  if (cause.fatal === true) return true;
  return error instanceof DatabaseError && cause.errno !== undefined && rolledBack.has(cause.errno);
}

/** An error without the statement and the values that a database error carries: those may be megabytes of draws. */
export const reasonOf = (error: unknown): { reason: string; stack?: string } =>
  error instanceof Error ? { reason: error.message, stack: error.stack } : { reason: String(error) };

/** Does it until it is done: what is passing is waited for with growing pauses of at most five seconds, for as long as it takes. */
export async function untilDone<T>(what: string, act: () => Promise<T>, signal: AbortSignal): Promise<T> {
  for (let attempt = 0; ; attempt++) {
    try {
      return await act();
    } catch (error) {
      if (!isPassing(error) || signal.aborted) throw error;
      log.warn({ ...reasonOf(error), attempt }, `${what}: trying again`);
      await sleep(Math.min(5_000, 100 * 2 ** attempt), undefined, { signal });
    }
  }
}
