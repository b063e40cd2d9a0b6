import type { Transaction } from 'sequelize';
import { Check, CheckBlock, MeasurementVersion } from '@/models';
import { database } from '@/lib/db';
import type { DatasetRanks } from '@/lib/inference/calibration';
import { checkRequestSchema, type CalibrationResult } from '@/lib/schemas';
import { clockAt, fromNow, leaseIsOver, updateRows } from './lease-sql';
import { measuredTogether } from './measured-together';
import type { CheckModel } from './check-model';

/** Checks that a worker may take and write; see lease-sql.ts for how. */
export const checkUnfinished = "status IN ('queued', 'running')";

const update = async (...query: Parameters<typeof updateRows>): Promise<boolean> =>
  (await updateRows(...query)) === 1;

/** Takes an unfinished check whose lease is over: its new epoch. Null where it has ended or another worker holds it. */
export async function takeCheckLease(
  checkId: string,
  leaseMs: number,
  now: Date | undefined,
  transaction: Transaction,
): Promise<number | null> {
  const taken = await update(
    `UPDATE checks SET epoch = epoch + 1, status = 'running', lease_until = ${fromNow(leaseMs, now)}
     WHERE id = :checkId AND ${checkUnfinished} AND ${leaseIsOver(clockAt(now))}`,
    { checkId },
    transaction,
  );
  if (!taken) return null;
  const check = await Check.findByPk(checkId, { attributes: ['epoch'], transaction, rejectOnEmpty: true });
  return check.epoch;
}

/** A check as a worker holds it. */
export interface HeldCheck {
  checkId: string;
  epoch: number;
  model: CheckModel;
  /** What is found already, by the first data set of each block. */
  blocks: Map<number, DatasetRanks[]>;
  stopRequested: boolean;
}

/** Reads a check that was taken at `epoch`; null where another worker has taken it since. */
export async function readHeldCheck(checkId: string, epoch: number): Promise<HeldCheck | null> {
  return database().transaction(async (transaction) => {
    const check = await Check.findByPk(checkId, { transaction, rejectOnEmpty: true });
    if (check.epoch !== epoch) return null;
    const version = await MeasurementVersion.findByPk(check.measurementVersionId, {
      transaction,
      rejectOnEmpty: true,
    });
    const request = checkRequestSchema.parse(check.request);
    const { numbers } = await measuredTogether(version, request, transaction);
    const blocks = await CheckBlock.findAll({ where: { checkId }, transaction });
    return {
      checkId,
      epoch,
      model: { numbers, request },
      blocks: new Map(blocks.map(({ first, found }) => [first, found as DatasetRanks[]])),
      stopRequested: check.stopRequested,
    };
  });
}

type Fenced = Pick<HeldCheck, 'checkId' | 'epoch'>;

/** Holds on to a check, and says whether it is to stop; null where another worker has it. */
export async function renewCheck({ checkId, epoch }: Fenced, leaseMs: number): Promise<boolean | null> {
  const held = await update(
    `UPDATE checks SET lease_until = ${fromNow(leaseMs)} WHERE id = :checkId AND epoch = :epoch AND ${checkUnfinished}`,
    { checkId, epoch },
  );
  if (!held) return null;
  return (await Check.findByPk(checkId, { attributes: ['stopRequested'] }))?.stopRequested ?? null;
}

/**
 * Stores one block. `milliseconds` is the time since the last one was stored. Says whether the check is to stop; null where
 * another worker has it, and nothing is written then. A block that is there already, because the answer was lost, stays.
 */
export async function commitBlock(
  { checkId, epoch }: Fenced,
  first: number,
  found: DatasetRanks[],
  milliseconds: number,
): Promise<boolean | null> {
  return database().transaction(async (transaction) => {
    const check = await Check.findByPk(checkId, {
      attributes: ['id', 'epoch', 'status', 'stopRequested'],
      transaction,
      lock: transaction.LOCK.UPDATE,
    });
    if (check?.epoch !== epoch || check.status !== 'running') return null;
    const known = await CheckBlock.findOne({ where: { checkId, first }, attributes: ['id'], transaction });
    if (known) return check.stopRequested;
    await CheckBlock.create({ checkId, first, found }, { transaction });
    await update(
      `UPDATE checks SET done = done + :count, milliseconds_spent = milliseconds_spent + :milliseconds
       WHERE id = :checkId AND epoch = :epoch`,
      { checkId, epoch, count: found.length, milliseconds: Math.round(milliseconds) },
      transaction,
    );
    return check.stopRequested;
  });
}

/** Stores the result and ends the check; false where another worker has it by now. */
export async function commitResult({ checkId, epoch }: Fenced, result: CalibrationResult): Promise<boolean> {
  const [rows] = await Check.update(
    {
      status: 'done',
      stopRequested: false,
      leaseUntil: null,
      result: JSON.stringify(result),
      endedAt: new Date(),
    },
    { where: { id: checkId, epoch, status: 'running' } },
  );
  return rows > 0;
}

/** Ends a check that was asked to stop; its blocks stay. */
export const endStopped = ({ checkId, epoch }: Fenced): Promise<boolean> =>
  update(
    `UPDATE checks SET status = 'stopped', stop_requested = 0, lease_until = NULL, ended_at = UTC_TIMESTAMP(3)
     WHERE id = :checkId AND epoch = :epoch AND ${checkUnfinished}`,
    { checkId, epoch },
  );

/** Ends a check that can't be made, with the reason. */
export const failCheck = ({ checkId, epoch }: Fenced, message: string): Promise<boolean> =>
  update(
    `UPDATE checks SET status = 'failed', message = :message, stop_requested = 0, lease_until = NULL,
       ended_at = UTC_TIMESTAMP(3)
     WHERE id = :checkId AND epoch = :epoch AND ${checkUnfinished}`,
    { checkId, epoch, message: message.slice(0, 1000) },
  );

/** Gives a check back that this worker can't finish, so that another needn't wait for the lease to run out. */
export const releaseCheck = ({ checkId, epoch }: Fenced): Promise<boolean> =>
  update(
    `UPDATE checks SET lease_until = NULL WHERE id = :checkId AND epoch = :epoch AND ${checkUnfinished}`,
    { checkId, epoch },
  );
