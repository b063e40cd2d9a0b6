import { randomBytes } from 'node:crypto';
import type { Transaction } from 'sequelize';
import {
  Fit,
  FitPart,
  MeasurementVersion,
  Notebook,
  NotebookRevision,
  type NotebookSettings,
} from '@/models';
import { database } from '@/lib/db';
import { AppError, notFound } from '@/lib/errors';
import { enqueueFit } from '@/lib/jobs';
import { log } from '@/lib/log';
import {
  defaultFit,
  endedStatuses,
  fitStatusSchema,
  snapshotSchema,
  type ExtendFit,
  type Fit as FitAnswer,
  type Snapshot,
  type StartFit,
} from '@/lib/schemas';
import type { Access } from './access';
import { recordEvent } from './audit';
import { canonicalSha256 } from './canonical-json';
import { expectedSeconds, lastRate } from './fit-cost';
import { noteEnd } from './fit-mails';
import { blockDraws, warmupDraws } from './fit-schedule';
import { readFit } from './fit-records';
import { samplerOfNewFits } from './fit-sampler';
import { inferenceSpec } from './inference-spec';
import { measuredTogether, type MeasuredTogether } from './measured-together';
import { refuseArchived } from './notebook-archive';
import { tellNotebook } from './notebook-presence';
import { checkFittable } from './notebook-settings';
import { program } from './program';
import { emptyReport, storedReportSchema } from '@/lib/schemas/stored-report';

export { readFit } from './fit-records';

/** Most kept draws a replica that a fit may come to. */
const mostDraws = 1_000_000;

/** Wakes a worker. A queue that is away holds nothing up: workers look for fits that nobody has taken by themselves. */
export async function wakeFit(fitId: string, epoch: number): Promise<void> {
  try {
    await enqueueFit(fitId, epoch);
  } catch (error) {
    log.warn({ fitId, err: error }, 'a fit is left to the workers’ own search');
  }
}

const frozenVersion = ({ files, version, mapping, spectrum, mockCount }: MeasurementVersion) => ({
  inputs: files.map(({ part, sha256 }) => ({ part, sha256 })),
  measurementVersion: version,
  mapping,
  ...(spectrum ? { spectrum } : {}),
  mockCount,
});

/** What a fit with these settings freezes; without a seed in `body` each call draws another. */
export function freeze(
  { parts }: Pick<MeasuredTogether, 'parts'>,
  settings: NotebookSettings,
  body: StartFit,
): Snapshot {
  const { cuts, likelihood, template, priors, also = [], sharedMocks } = settings;
  const [{ version }, ...further] = parts;
  // Only what the schema lists is frozen, in the form in which it is hashed.
  return snapshotSchema.parse({
    ...frozenVersion(version),
    cuts,
    likelihood,
    ...(further.length > 0
      ? { also: further.map((part, k) => ({ ...frozenVersion(part.version), cuts: also[k].cuts })) }
      : {}),
    ...(sharedMocks ? { sharedMocks } : {}),
    template,
    priors,
    seed: body.seed === undefined ? randomBytes(16).toString('hex') : String(body.seed),
    replicas: body.replicas ?? defaultFit.replicas,
    warmup: warmupDraws,
    blockDraws,
    sampler: samplerOfNewFits,
    ...program,
  });
}

/** The notebook of `access` as it stands, locked so that its fits are numbered one by one. */
export async function lockNotebook(access: Access, transaction: Transaction) {
  const notebook = await Notebook.findByPk(access.id, { lock: true, transaction });
  if (!notebook) throw notFound('notebook');
  const [revision, version] = await Promise.all([
    NotebookRevision.findOne({
      where: { notebookId: notebook.id, revision: notebook.revision },
      transaction,
    }),
    MeasurementVersion.findByPk(notebook.measurementVersionId, { transaction }),
  ]);
  if (!revision || !version) throw notFound('notebook');
  const measured = await measuredTogether(version, revision.settings, transaction);
  return { notebook, revision, version, measured };
}

/** What a new fit freezes: a revision of a notebook on a version of its measurement. */
export interface FitOrigin {
  notebook: Notebook;
  revision: number;
  settings: NotebookSettings;
  measured: MeasuredTogether;
  /** The fit whose settings it repeats, if it does. */
  repeats?: Fit;
}

/** Writes the row of a new fit, queued, in the transaction that holds the notebook's lock. `invalid` where it can't be fitted. */
export async function addFit(
  access: Access,
  { notebook, revision, settings, measured, repeats }: FitOrigin,
  body: StartFit,
  transaction: Transaction,
): Promise<Fit> {
  checkFittable(inferenceSpec(measured.numbers, settings).spec);
  const snapshot = freeze(measured, settings, body);
  const [{ version }, ...further] = measured.parts;
  const maxDraws = body.maxDraws ?? defaultFit.maxDraws;
  const now = new Date();
  const last = await Fit.max<number | null, Fit>('number', {
    where: { notebookId: notebook.id },
    transaction,
  });
  const made = await Fit.create(
    {
      notebookId: notebook.id,
      groupId: notebook.groupId,
      number: (last ?? 0) + 1,
      revision,
      measurementVersionId: version.id,
      snapshot,
      snapshotSha256: canonicalSha256(snapshot),
      maxDraws,
      targetRhat: body.target?.rhat ?? defaultFit.rhat,
      targetEss: body.target?.ess ?? defaultFit.ess,
      status: 'queued',
      repeatsId: repeats?.id ?? null,
      startedBy: access.actor.userId,
      createdAt: now,
      queuedAt: now,
      expectedSeconds: expectedSeconds({ snapshot, draws: 0, maxDraws, rate: await lastRate(notebook.id) }),
    },
    { transaction },
  );
  for (const [k, part] of further.entries()) {
    const row = { fitId: made.id, place: k + 1, measurementVersionId: part.version.id };
    await FitPart.create(row, { transaction });
  }
  const details = { number: made.number, revision, ...(repeats && { repeats: repeats.number }) };
  await recordChange(access, made, 'fit.start', details, transaction);
  return made;
}

/** While a measurement is blind, a fit needs a frozen plan. */
export function refuseBlind({ blind }: { blind: boolean }): void {
  if (!blind) return;
  throw new AppError('plan_missing', 'The measurement is blind: freeze a plan before the first fit.');
}

/** Freezes the notebook of `access` as it stands and queues the sampling. */
export async function startFit(access: Access, body: StartFit): Promise<{ id: string }> {
  access.require('fit.start');
  const fit = await database().transaction(async (transaction) => {
    const { notebook, revision, measured } = await lockNotebook(access, transaction);
    refuseArchived(notebook);
    refuseBlind(measured);
    const { settings } = revision;
    return addFit(access, { notebook, revision: revision.revision, settings, measured }, body, transaction);
  });
  await wakeFit(fit.id, 0);
  void tellNotebook(fit.notebookId);
  return { id: fit.id };
}

const recordChange = (
  { actor }: Access,
  fit: Fit,
  action: string,
  details: Record<string, unknown>,
  transaction: Transaction,
): Promise<void> =>
  recordEvent(
    { groupId: fit.groupId, actorId: actor.userId, action, subjectType: 'fit', subjectId: fit.id, details },
    transaction,
  );

/** Changes the row of the fit of `access` under its lock; `change` says what of it, or null for nothing. */
async function change(
  access: Access,
  action: 'fit.stop' | 'fit.resume' | 'fit.extend',
  decide: (
    fit: Fit,
  ) => { values: Partial<Fit['_creationAttributes']>; details: Record<string, unknown> } | null,
): Promise<FitAnswer> {
  access.require(action);
  const woken = await database().transaction(async (transaction) => {
    const fit = await Fit.findByPk(access.id, { lock: true, transaction });
    if (!fit) throw notFound('fit');
    if (action !== 'fit.stop') {
      refuseArchived(await Notebook.findByPk(fit.notebookId, { rejectOnEmpty: true, transaction }));
    }
    const decided = decide(fit);
    if (decided === null) return null;
    await fit.update(decided.values, { transaction });
    if (decided.values.status === 'stopped') await noteEnd(fit, 'stopped', transaction);
    await recordChange(access, fit, action, decided.details, transaction);
    return fit.status === 'queued' ? { id: fit.id, epoch: fit.epoch } : null;
  });
  if (woken) await wakeFit(woken.id, woken.epoch);
  return readFit(access);
}

const hasEnded = (fit: Fit): boolean => endedStatuses.includes(fitStatusSchema.parse(fit.status));
const isHeld = (fit: Fit): boolean => fit.leaseUntil !== null && fit.leaseUntil.getTime() > Date.now();
const lookedAt = (fit: Fit): number =>
  (fit.report === null ? emptyReport : storedReportSchema.parse(fit.report)).draws;

/** A new epoch with the new course, so that whoever held the fit before can't write any more. */
const queuedAgain = (fit: Fit, maxDraws = fit.maxDraws) => ({
  status: 'queued',
  stopRequested: false,
  stoppedBy: null,
  queuedAt: new Date(),
  expectedSeconds: expectedSeconds({
    snapshot: snapshotSchema.parse(fit.snapshot),
    draws: fit.draws,
    maxDraws,
    rate: fit.drawsPerSecond,
  }),
  epoch: fit.epoch + 1,
  leaseUntil: null,
  endedAt: null,
});

/**
 * Stops a fit at the end of the present block; what it has drawn stays. One that nobody holds and whose diagnostics are of all
 * its draws ends here; else the worker that takes it up computes them and ends it. Stopping what has ended changes nothing.
 */
export const stopFit = (access: Access): Promise<FitAnswer> =>
  change(access, 'fit.stop', (fit) => {
    if (hasEnded(fit) || fit.stopRequested) return null;
    const details = { draws: fit.draws };
    if (!isHeld(fit) && lookedAt(fit) === fit.draws) {
      const ended = {
        status: 'stopped',
        epoch: fit.epoch + 1,
        leaseUntil: null,
        stoppedBy: access.actor.userId,
        endedAt: new Date(),
      };
      return { values: ended, details };
    }
    return { values: { stopRequested: true, stoppedBy: access.actor.userId }, details };
  });

/** Goes on with a stopped or failed fit up to its budget, or takes a stop back that hasn't come about. */
export const resumeFit = (access: Access): Promise<FitAnswer> =>
  change(access, 'fit.resume', (fit) => {
    const details = { draws: fit.draws };
    if (!hasEnded(fit)) {
      if (fit.stopRequested) return { values: { stopRequested: false, stoppedBy: null }, details };
      throw new AppError('conflict', 'The fit is running; there is nothing to resume.');
    }
    if (fit.status === 'stopped') return { values: queuedAgain(fit), details };
    if (fit.status === 'failed') return { values: { ...queuedAgain(fit), message: null }, details };
    const how = fit.status === 'converged' ? 'has met its target' : 'has spent its budget';
    throw new AppError('conflict', `The fit ${how}; extend it by a number of draws to go on.`);
  });

/**
 * Allows `draws` more kept draws a replica: beyond those that it has, if it has ended; beyond its budget, if it is running. A
 * fit that had converged then goes on to the end of that budget, since its target is met already; for any other the target
 * ends it as before.
 */
export const extendFit = (access: Access, { draws }: ExtendFit): Promise<FitAnswer> =>
  change(access, 'fit.extend', (fit) => {
    if (fit.status === 'failed') {
      throw new AppError('conflict', 'The fit has failed; resume it before it is extended.');
    }
    const { warmup } = snapshotSchema.parse(fit.snapshot);
    const ended = hasEnded(fit);
    const maxDraws = draws + (ended ? Math.max(0, fit.draws - warmup) : fit.maxDraws);
    if (maxDraws > mostDraws) {
      const message = `That would come to ${maxDraws} kept draws a replica; at most ${mostDraws} are taken.`;
      throw new AppError('invalid', message, [{ path: 'draws', message }]);
    }
    const details = { draws, maxDraws };
    if (!ended) return { values: { maxDraws }, details };
    const targetFrom = fit.status === 'converged' ? maxDraws : fit.targetFrom;
    return { values: { ...queuedAgain(fit, maxDraws), maxDraws, targetFrom }, details };
  });
