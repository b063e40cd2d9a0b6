import { QueryTypes, type Transaction } from 'sequelize';
import { database } from '@/lib/db';

/**
 * What leases of fits, scans and checks are written with. Whoever takes one takes epoch + 1 together with a time by the database's
 * clock; every later write says `AND epoch = ?`, so that a worker that was paused and comes back changes nothing.
 */

/** The database's clock as SQL; a test may put another moment in its place. */
export const clockAt = (now?: Date): string =>
  now ? database().escape(now.toISOString().replace('T', ' ').replace('Z', '')) : 'UTC_TIMESTAMP(3)';

/** So many milliseconds from now, as SQL. */
export const fromNow = (milliseconds: number, now?: Date): string =>
  `TIMESTAMPADD(MICROSECOND, ${Math.round(milliseconds) * 1000}, ${clockAt(now)})`;

export const isHeld = (at: string): string => `lease_until >= ${at}`;
export const leaseIsOver = (at: string): string => `(lease_until IS NULL OR lease_until < ${at})`;

/** Runs an UPDATE and says how many rows its WHERE found. */
export async function updateRows(
  sql: string,
  values: Record<string, unknown>,
  transaction?: Transaction,
): Promise<number> {
  const [, rows] = await database().query(sql, {
    replacements: values,
    type: QueryTypes.UPDATE,
    transaction,
  });
  return rows;
}
