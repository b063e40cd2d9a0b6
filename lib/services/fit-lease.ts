import { QueryTypes, type Transaction } from 'sequelize';
import { Fit, FitReplica, MeasurementVersion } from '@/models';
import { database } from '@/lib/db';
import { snapshotSchema, type FitStatus, type Snapshot } from '@/lib/schemas';
import { fitModel, type FitModel } from './fit-model';
import { program } from './program';
import { emptyReport, storedReportSchema, type StoredReport } from '@/lib/schemas/stored-report';

/**
 * Who may write a fit. A worker takes epoch + 1 together with a lease by the database's clock; every later write says
 * `AND epoch = ?`, so that a worker that was paused and comes back changes nothing.
 */
export const unfinished = ['queued', 'warming-up', 'sampling'] as const satisfies readonly FitStatus[];

const from = (milliseconds: number) =>
  `TIMESTAMPADD(MICROSECOND, ${Math.round(milliseconds) * 1000}, UTC_TIMESTAMP(3))`;
const running = `status IN (${unfinished.map((status) => `'${status}'`).join(', ')})`;
const leaseOver = '(lease_until IS NULL OR lease_until < UTC_TIMESTAMP(3))';

/** Runs an UPDATE and says how many rows its WHERE found. */
async function update(
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

/** A fit as a worker takes it up: everything that its course depends on. */
export interface ClaimedFit {
  fitId: string;
  epoch: number;
  model: FitModel;
  snapshot: Snapshot;
  /** Recorded draws a replica that are committed. */
  draws: number;
  maxDraws: number;
  target: { rhat: number; ess: number };
  targetFrom: number;
  stopRequested: boolean;
  report: StoredReport;
  /** Serialised state of every replica; empty before the first commit. */
  states: Map<number, Buffer>;
}

/** Takes an unfinished fit whose lease is over. Null where it has ended or another worker holds it. */
export async function claimFit(fitId: string, leaseMs: number): Promise<ClaimedFit | null> {
  return database().transaction(async (transaction) => {
    const taken = await update(
      `UPDATE fits SET epoch = epoch + 1, lease_until = ${from(leaseMs)},
         started_at = COALESCE(started_at, UTC_TIMESTAMP(3))
       WHERE id = :fitId AND ${running} AND ${leaseOver}`,
      { fitId },
      transaction,
    );
    if (taken === 0) return null;
    const fit = await Fit.findByPk(fitId, { transaction, rejectOnEmpty: true });
    const snapshot = snapshotSchema.parse(fit.snapshot);
    if (fit.status === 'queued') {
      await fit.update({ status: fit.draws < snapshot.warmup ? 'warming-up' : 'sampling' }, { transaction });
    }
    const version = await MeasurementVersion.findByPk(fit.measurementVersionId, {
      transaction,
      rejectOnEmpty: true,
    });
    const replicas = await FitReplica.findAll({ where: { fitId }, transaction });
    const astray = replicas.find(({ draws }) => draws !== fit.draws);
    if (astray || (fit.draws > 0 && replicas.length !== snapshot.replicas)) {
      throw new Error(`The states of fit ${fitId} aren't all at its ${fit.draws} draws.`);
    }
    return {
      fitId,
      epoch: fit.epoch,
      model: fitModel(version, snapshot),
      snapshot,
      draws: fit.draws,
      maxDraws: fit.maxDraws,
      target: { rhat: fit.targetRhat, ess: fit.targetEss },
      targetFrom: fit.targetFrom,
      stopRequested: fit.stopRequested,
      report: fit.report === null ? emptyReport : storedReportSchema.parse(fit.report),
      states: new Map(replicas.map(({ replica, state }) => [replica, state])),
    };
  });
}

/** Holds on to a lease; false where another worker has taken the fit. */
export async function renewLease(fitId: string, epoch: number, leaseMs: number): Promise<boolean> {
  const rows = await update(
    `UPDATE fits SET lease_until = ${from(leaseMs)} WHERE id = :fitId AND epoch = :epoch AND ${running}`,
    { fitId, epoch },
  );
  return rows === 1;
}

/**
 * Says in the fit's message when it is sampled by another program, Node.js or architecture than its snapshot names: the draws
 * from there on can't be promised to be those of an undisturbed run.
 */
export async function noteMachine({ fitId, epoch, draws, snapshot }: ClaimedFit): Promise<void> {
  const named = { program: snapshot.program, node: snapshot.node, architecture: snapshot.architecture };
  const parts = (
    [
      ['program', 'Beatnote'],
      ['node', 'Node.js'],
      ['architecture', 'architecture'],
    ] as const
  )
    .filter(([key]) => named[key] !== program[key])
    .map(([key, name]) => `${name} ${program[key]} in place of ${named[key]}`);
  if (parts.length === 0) return;
  const message = `From draw ${draws} on sampled with ${parts.join(', ')}: a run in one go may differ from there.`;
  await update('UPDATE fits SET message = :message WHERE id = :fitId AND epoch = :epoch', {
    fitId,
    epoch,
    message,
  });
}

/** Gives an unfinished fit back, so that another worker needn't wait for the lease to run out. */
export async function releaseLease(fitId: string, epoch: number): Promise<void> {
  await update('UPDATE fits SET lease_until = NULL WHERE id = :fitId AND epoch = :epoch', { fitId, epoch });
}

/** Ends a fit that can't be sampled, with the reason. False where another worker has taken it. */
export async function failFit(fitId: string, epoch: number, message: string): Promise<boolean> {
  const rows = await update(
    `UPDATE fits SET status = 'failed', message = :message, lease_until = NULL, stop_requested = 0,
       ended_at = UTC_TIMESTAMP(3)
     WHERE id = :fitId AND epoch = :epoch AND ${running}`,
    { fitId, epoch, message: message.slice(0, 1000) },
  );
  return rows === 1;
}

/** Ends a fit that can't even be taken up, so that it isn't queued for ever; one that somebody holds is left alone. */
export async function failUnheld(fitId: string, message: string): Promise<void> {
  await update(
    `UPDATE fits SET status = 'failed', message = :message, epoch = epoch + 1, lease_until = NULL,
       stop_requested = 0, ended_at = UTC_TIMESTAMP(3)
     WHERE id = :fitId AND ${running} AND ${leaseOver}`,
    { fitId, message },
  );
}

/** Unfinished fits that nobody holds: those that a queue has to be told of (again). */
export async function unheldFits(): Promise<{ id: string; epoch: number }[]> {
  return database().query<{ id: string; epoch: number }>(
    `SELECT id, epoch FROM fits WHERE ${running} AND ${leaseOver} ORDER BY created_at LIMIT 500`,
    { type: QueryTypes.SELECT },
  );
}
