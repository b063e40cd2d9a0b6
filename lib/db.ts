import type { Sequelize } from 'sequelize';
import { openDatabase } from '@/models';
import { config } from '@/lib/config';

/**
 * Beside the models and not in `globalThis`: opening binds the very classes that were imported, so wherever a bundle
 * evaluates them anew it must open them anew. An idle pool holds no connection.
 */
let open: Sequelize | undefined;

/** The database of this process; the first call binds the models, so every use of a model comes after one. */
export function database(): Sequelize {
  return (open ??= openDatabase(config().databaseUrl));
}

export async function closeDatabase(): Promise<void> {
  const closing = open;
  open = undefined;
  await closing?.close();
}
