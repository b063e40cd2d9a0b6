import { QueryTypes } from 'sequelize';
import { MeasurementVersion, Scan } from '@/models';
import { database } from '@/lib/db';
import { scanRequestSchema } from '@/lib/schemas';
import { measuredTogether } from './measured-together';
import { clockAt, fromNow, leaseIsOver, updateRows } from './lease-sql';
import type { FinishedScan, ScanJobModel } from './scan-model';

/** Scans that a worker may take and write; see lease-sql.ts for how. */
const running = "status IN ('queued', 'running')";

const update = async (...query: Parameters<typeof updateRows>): Promise<boolean> =>
  (await updateRows(...query)) > 0;

export interface ClaimedScan {
  scanId: string;
  epoch: number;
  model: ScanJobModel;
}

/** Takes an unfinished scan that nobody holds; null where there is nothing to take. */
export async function claimScan(scanId: string, leaseMs: number): Promise<ClaimedScan | null> {
  return database().transaction(async (transaction) => {
    const rows = await updateRows(
      `UPDATE scans SET epoch = epoch + 1, status = 'running', progress = 0, lease_until = ${fromNow(leaseMs)}
       WHERE id = :scanId AND ${running} AND ${leaseIsOver(clockAt())}`,
      { scanId },
      transaction,
    );
    if (rows === 0) return null;
    const scan = await Scan.findByPk(scanId, { transaction, rejectOnEmpty: true });
    const version = await MeasurementVersion.findByPk(scan.measurementVersionId, {
      transaction,
      rejectOnEmpty: true,
    });
    const request = scanRequestSchema.parse(scan.request);
    const { parts, numbers } = await measuredTogether(version, request, transaction);
    return {
      scanId,
      epoch: scan.epoch,
      model: {
        numbers,
        request,
        seed: ['nulls', ...parts.map((part) => part.version.sha256)].join('/'),
      },
    };
  });
}

/** Holds on to a scan and says how far it is; false where another worker has it. */
export const renewScan = (
  { scanId, epoch }: ClaimedScan,
  leaseMs: number,
  progress: number,
): Promise<boolean> =>
  update(
    `UPDATE scans SET lease_until = ${fromNow(leaseMs)}, progress = :progress
     WHERE id = :scanId AND epoch = :epoch AND ${running}`,
    { scanId, epoch, progress },
  );

/** Stores what was found; false where another worker has the scan by now. */
export async function commitScan(
  { scanId, epoch }: ClaimedScan,
  { result, heights, planeHeights }: FinishedScan,
): Promise<boolean> {
  const [rows] = await Scan.update(
    {
      status: 'done',
      progress: 1,
      leaseUntil: null,
      result: JSON.stringify(result),
      heights,
      planeHeights,
      endedAt: new Date(),
    },
    { where: { id: scanId, epoch, status: 'running' } },
  );
  return rows > 0;
}

/** Ends a scan that can't be done, with the reason. */
export const failScan = ({ scanId, epoch }: ClaimedScan, message: string): Promise<boolean> =>
  update(
    `UPDATE scans SET status = 'failed', message = :message, lease_until = NULL, ended_at = UTC_TIMESTAMP(3)
     WHERE id = :scanId AND epoch = :epoch AND ${running}`,
    { scanId, epoch, message: message.slice(0, 1000) },
  );

/** Gives a scan back that this worker can't finish. */
export const releaseScan = ({ scanId, epoch }: ClaimedScan): Promise<boolean> =>
  update(
    `UPDATE scans SET status = 'queued', lease_until = NULL WHERE id = :scanId AND epoch = :epoch AND ${running}`,
    { scanId, epoch },
  );

/** Unfinished scans that nobody holds. */
export const unheldScans = (): Promise<{ id: string; epoch: number }[]> =>
  database().query<{ id: string; epoch: number }>(
    `SELECT id, epoch FROM scans WHERE ${running} AND ${leaseIsOver(clockAt())} ORDER BY created_at LIMIT 200`,
    { type: QueryTypes.SELECT },
  );
