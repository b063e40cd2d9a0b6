import type { Transaction } from 'sequelize';
import { Fit, FitReplica, MeasurementVersion } from '@/models';
import { database } from '@/lib/db';
import { snapshotSchema, type FitStatus, type Snapshot } from '@/lib/schemas';
import { noteEnd } from './fit-mails';
import { fitModel, type FitModel } from './fit-model';
import { clockAt, fromNow, leaseIsOver, updateRows } from './lease-sql';
import { alsoOfFit, measuredTogether } from './measured-together';
import { program } from './program';
import { emptyReport, storedReportSchema, type StoredReport } from '@/lib/schemas/stored-report';

/** Fits that a worker may take and write; see lease-sql.ts for how. */
const unfinished = ['queued', 'warming-up', 'sampling'] as const satisfies readonly FitStatus[];

export const isUnfinished = `status IN (${unfinished.map((status) => `'${status}'`).join(', ')})`;

/** A fit as a worker holds it: everything that its course depends on. */
export interface HeldFit {
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

/**
 * Takes an unfinished fit whose lease is over: its new epoch. Null where it has ended or another worker holds it. Which fit it
 * is to be is the queue's to say.
 */
export async function takeLease(
  fitId: string,
  leaseMs: number,
  now: Date | undefined,
  transaction: Transaction,
): Promise<number | null> {
  const taken = await updateRows(
    `UPDATE fits SET epoch = epoch + 1, lease_until = ${fromNow(leaseMs, now)},
       started_at = COALESCE(started_at, ${clockAt(now)}),
       status = IF(status = 'queued', IF(draws < JSON_VALUE(snapshot, '$.warmup'), 'warming-up', 'sampling'), status)
     WHERE id = :fitId AND ${isUnfinished} AND ${leaseIsOver(clockAt(now))}`,
    { fitId },
    transaction,
  );
  if (taken === 0) return null;
  const fit = await Fit.findByPk(fitId, { attributes: ['epoch'], transaction, rejectOnEmpty: true });
  return fit.epoch;
}

/** Reads a fit that was taken at `epoch`; null where another worker has taken it since. */
export async function readHeld(fitId: string, epoch: number): Promise<HeldFit | null> {
  return database().transaction(async (transaction) => {
    const fit = await Fit.findByPk(fitId, { transaction, rejectOnEmpty: true });
    if (fit.epoch !== epoch) return null;
    const snapshot = snapshotSchema.parse(fit.snapshot);
    const version = await MeasurementVersion.findByPk(fit.measurementVersionId, {
      transaction,
      rejectOnEmpty: true,
    });
    const chosen = await alsoOfFit(fit.id, snapshot, transaction);
    const { numbers } = await measuredTogether(version, chosen, transaction);
    const replicas = await FitReplica.findAll({ where: { fitId }, transaction });
    const astray = replicas.find(({ draws }) => draws !== fit.draws);
    if (astray || (fit.draws > 0 && replicas.length !== snapshot.replicas)) {
      throw new Error(`The states of fit ${fitId} aren't all at its ${fit.draws} draws.`);
    }
    return {
      fitId,
      epoch,
      model: fitModel(numbers, snapshot),
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
  const rows = await updateRows(
    `UPDATE fits SET lease_until = ${fromNow(leaseMs)} WHERE id = :fitId AND epoch = :epoch AND ${isUnfinished}`,
    { fitId, epoch },
  );
  return rows === 1;
}

/**
 * Says in the fit's message when it is sampled by another program, Node.js or architecture than its snapshot names: the draws
 * from there on can't be promised to be those of an undisturbed run.
 */
export async function noteMachine({ fitId, epoch, draws, snapshot }: HeldFit): Promise<void> {
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
  await updateRows('UPDATE fits SET message = :message WHERE id = :fitId AND epoch = :epoch', {
    fitId,
    epoch,
    message,
  });
}

/** Gives an unfinished fit back, so that another worker needn't wait for the lease to run out. */
export async function releaseLease(fitId: string, epoch: number): Promise<void> {
  await updateRows('UPDATE fits SET lease_until = NULL WHERE id = :fitId AND epoch = :epoch', {
    fitId,
    epoch,
  });
}

/** Ends a fit that can't be sampled, with the reason. False where another worker has taken it. */
export async function failFit(fitId: string, epoch: number, message: string): Promise<boolean> {
  return database().transaction(async (transaction) => {
    const rows = await updateRows(
      `UPDATE fits SET status = 'failed', message = :message, lease_until = NULL, stop_requested = 0,
         ended_at = UTC_TIMESTAMP(3)
       WHERE id = :fitId AND epoch = :epoch AND ${isUnfinished}`,
      { fitId, epoch, message: message.slice(0, 1000) },
      transaction,
    );
    if (rows !== 1) return false;
    const attributes = ['id', 'epoch', 'startedBy', 'stoppedBy'];
    await noteEnd(
      await Fit.findByPk(fitId, { attributes, transaction, rejectOnEmpty: true }),
      'failed',
      transaction,
    );
    return true;
  });
}
