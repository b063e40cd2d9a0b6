import { MeasurementVersion } from '@/models';
import { log } from '@/lib/log';
import { storage } from '@/storage';
import { filesPrefix, versionOfKey } from './measurement-files';

/** An upload has its rows within a minute of its first object, or it never will. */
const strayAfterMs = 60 * 60_000;

/** Those of the keys that the row of their version names. */
async function namedKeys(keys: readonly string[]): Promise<Set<string>> {
  const ids = new Set(keys.flatMap((key) => versionOfKey(key) ?? []));
  const versions = await MeasurementVersion.findAll({ where: { id: [...ids] }, attributes: ['files'] });
  return new Set(versions.flatMap(({ files }) => files.map(({ key }) => key)));
}

/**
 * Deletes the uploaded files that no measurement's version names: a process that is killed between storing objects and
 * committing rows leaves them behind. Young ones may still get their rows and stay, and so does what isn't ours by its
 * key. Gives how many went. May run in several processes at once.
 */
export async function deleteStrayFiles(now: Date, pageSize?: number): Promise<number> {
  // Beside an empty database every file would be a stray one: it is new, or not the one that belongs to this store.
  if (!(await MeasurementVersion.findOne({ attributes: ['id'] }))) return 0;
  let deleted = 0;
  for await (const page of storage().list(filesPrefix, pageSize)) {
    const old = page
      .filter(({ key, storedAt }) => now.getTime() - storedAt.getTime() > strayAfterMs && versionOfKey(key))
      .map(({ key }) => key);
    if (old.length === 0) continue;
    const named = await namedKeys(old);
    for (const key of old) {
      if (named.has(key)) continue;
      await storage().delete(key);
      log.info({ key }, 'an uploaded file without a row was deleted');
      deleted += 1;
    }
  }
  return deleted;
}
