import { QueryTypes, type Transaction } from 'sequelize';
import { database } from '@/lib/db';
import { readOnce } from './reading';

/** A version of a measurement with its points and without its covariance, which is the square of the rest. */
export interface VersionLine {
  id: string;
  measurementId: string;
  version: number;
  rows: number;
  hasBinEdges: boolean;
  points: Buffer;
  name: string;
  blind: boolean;
  simulated: boolean;
  /** The newest version of the measurement that there is. */
  newest: number;
}

type Row = Omit<VersionLine, 'hasBinEdges' | 'blind' | 'simulated'> &
  Record<'hasBinEdges' | 'blind' | 'simulated', number>;

/** Versions by their ids, each with its measurement. */
export async function versionLines(
  ids: readonly string[],
  transaction?: Transaction,
): Promise<Map<string, VersionLine>> {
  if (ids.length === 0) return new Map();
  const rows = await database().query<Row>(
    `SELECT v.id, v.measurement_id AS measurementId, v.version, v.row_count AS \`rows\`, v.has_bin_edges AS hasBinEdges,
            v.points, m.name, m.blind, m.simulated,
            (SELECT MAX(o.version) FROM measurement_versions AS o WHERE o.measurement_id = m.id) AS newest
       FROM measurement_versions AS v
       JOIN measurements AS m ON m.id = v.measurement_id
      WHERE v.id IN (:ids)`,
    { replacements: { ids: [...new Set(ids)] }, type: QueryTypes.SELECT, transaction },
  );
  return new Map(
    rows.map((row) => [
      row.id,
      {
        ...row,
        hasBinEdges: Boolean(row.hasBinEdges),
        blind: Boolean(row.blind),
        simulated: Boolean(row.simulated),
      },
    ]),
  );
}

/** One version; null where it isn't there. */
export const versionLine = (id: string): Promise<VersionLine | null> =>
  readOnce(`version ${id}`, async () => (await versionLines([id])).get(id) ?? null);

/** Whether the measurement of a version is blind; a version that isn't there counts as blind. */
export const isBlindVersion = (id: string): Promise<boolean> =>
  readOnce(`blind ${id}`, async () => {
    const rows = await database().query<{ blind: number }>(
      `SELECT m.blind FROM measurement_versions AS v JOIN measurements AS m ON m.id = v.measurement_id
        WHERE v.id = :id`,
      { replacements: { id }, type: QueryTypes.SELECT },
    );
    return rows.length === 0 || Boolean(rows[0].blind);
  });
