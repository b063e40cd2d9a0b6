import { randomBytes } from 'node:crypto';
import { mkdirSync, mkdtempSync, rmSync } from 'node:fs';
import { tmpdir } from 'node:os';
import path from 'node:path';
import { QueryTypes, type Sequelize } from 'sequelize';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { migrator } from '@/migrations';
import { openDatabase } from '@/models';
import { choosePorts } from '../../scripts/supervisor/ports.mjs';
import { startMariadb } from '../../scripts/supervisor/services.mjs';

// A server of its own: the others' tables stay while these come and go.
let database: Awaited<ReturnType<typeof startMariadb>>;
let sequelize: Sequelize;
const state = mkdtempSync(path.join(tmpdir(), 'beatnote-migrations-'));

beforeAll(async () => {
  for (const part of ['log', 'pid']) mkdirSync(path.join(state, part), { mode: 0o700 });
  const { database: port } = (await choosePorts(state, ['database'])) as { database: number };
  database = await startMariadb({ state, port, password: randomBytes(12).toString('hex') });
  sequelize = openDatabase(database.url);
});
afterAll(async () => {
  await sequelize.close();
  await database.server.stop();
  rmSync(state, { recursive: true, force: true });
});

/** Columns of every table. */
async function shape(): Promise<Record<string, string[]>> {
  const found = await sequelize.query<{ place: string; columns: string }>(
    `SELECT table_name AS place, GROUP_CONCAT(column_name ORDER BY column_name) AS columns
       FROM information_schema.columns WHERE table_schema = DATABASE() GROUP BY table_name`,
    { type: QueryTypes.SELECT },
  );
  return Object.fromEntries(found.map(({ place, columns }) => [place, columns.split(',')]));
}

describe('all migrations', () => {
  it('go up, down one by one, and up again to the same tables', async () => {
    const steps = migrator(sequelize);
    await steps.up();
    const up = await shape();
    expect(up.fits).toContain('repeats_id');
    while ((await steps.executed()).length > 0) await steps.down();
    expect(Object.keys(await shape())).toEqual(['schema_migrations']);
    await steps.up();
    expect(await shape()).toEqual(up);
  });
});
