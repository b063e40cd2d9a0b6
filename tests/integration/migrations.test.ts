import { QueryTypes, type QueryInterface } from 'sequelize';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { database } from '@/lib/db';
import * as fitQueueing from '@/migrations/0025-fit-queueing';
import * as fitLimits from '@/migrations/0026-fit-limits';
import * as fitMails from '@/migrations/0027-fit-mails';
import * as mailAboutFits from '@/migrations/0028-mail-about-fits';
import { closeConnections } from './harness';

let context: QueryInterface;
beforeAll(() => {
  context = database().getQueryInterface();
});
afterAll(closeConnections);

/** What the database says of a table that a migration makes or changes; null where there is none. */
async function shapeOf(table: string): Promise<unknown> {
  const rows = await database().query<{ column: string }>(
    `SELECT column_name AS \`column\`, column_type, is_nullable, column_default, column_key
     FROM information_schema.columns WHERE table_schema = DATABASE() AND table_name = :table ORDER BY column_name`,
    { replacements: { table }, type: QueryTypes.SELECT },
  );
  const keys = await database().query(
    `SELECT constraint_name, constraint_type FROM information_schema.table_constraints
     WHERE table_schema = DATABASE() AND table_name = :table ORDER BY constraint_name`,
    { replacements: { table }, type: QueryTypes.SELECT },
  );
  return rows.length === 0 ? null : { rows, keys };
}

describe('a migration', () => {
  it.each([
    ['0025-fit-queueing', 'fits', fitQueueing],
    ['0026-fit-limits', 'fit_limits', fitLimits],
    ['0027-fit-mails', 'fit_mails', fitMails],
    ['0028-mail-about-fits', 'users', mailAboutFits],
  ] as const)('%s goes down and up again to the same table', async (_, table, { up, down }) => {
    const there = await shapeOf(table);
    expect(there).not.toBeNull();
    await down({ context });
    expect(await shapeOf(table)).not.toEqual(there);
    await up({ context });
    expect(await shapeOf(table)).toEqual(there);
  });
});
