import { afterAll, describe, expect, it } from 'vitest';
import { database } from '@/lib/db';
import { migrator } from '@/migrations';
import { closeConnections } from './harness';

afterAll(closeConnections);

/** Every table with its columns and keys, as the database describes itself. */
async function schema(): Promise<string[]> {
  const [tables] = await database().query('SHOW TABLES');
  const names = (tables as Record<string, string>[]).map((row) => Object.values(row)[0]).sort();
  const described: string[] = [];
  for (const name of names.filter((one) => one !== 'schema_migrations')) {
    const [[row]] = (await database().query(`SHOW CREATE TABLE \`${name}\``)) as unknown as [
      Record<string, string>[],
    ];
    // The order of keys isn't part of a table's meaning.
    const lines = row['Create Table'].replace(/ AUTO_INCREMENT=\d+/, '').split('\n');
    described.push(
      lines
        .map((line) => line.replace(/,$/, ''))
        .sort()
        .join('\n'),
    );
  }
  return described;
}

/** Tests share one database, but none outlives its file: the steps may be taken back on it. */
describe('the migrations', () => {
  it('go up, down to nothing, and up again to the very same tables', async () => {
    const migrations = migrator(database());
    const before = await schema();
    expect(before.length).toBeGreaterThan(10);
    await migrations.down({ to: 0 });
    expect(await schema()).toEqual([]);
    await migrations.up();
    expect(await schema()).toEqual(before);
  });

  it('go one step down and up again, each of them', async () => {
    const migrations = migrator(database());
    const names = (await migrations.executed()).map(({ name }) => name);
    const after = new Map<string, string[]>();
    for (const name of [...names].reverse()) {
      after.set(name, await schema());
      await migrations.down();
    }
    for (const name of names) {
      await migrations.up({ step: 1 });
      expect(await schema(), name).toEqual(after.get(name));
    }
  });
});
