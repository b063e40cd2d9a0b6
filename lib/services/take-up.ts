import type { Transaction } from 'sequelize';
import {
  Fit,
  Group,
  Measurement,
  MeasurementVersion,
  Notebook,
  NotebookRevision,
  type NotebookSettings,
} from '@/models';
import { database } from '@/lib/db';
import { AppError, notFound } from '@/lib/errors';
import {
  snapshotSchema,
  type AllTakenUp,
  type NotebookSection,
  type StartFit,
  type TakenUp,
  type TakeUp,
} from '@/lib/schemas';
import { authorise, type Access } from './access';
import { recordEvent } from './audit';
import { canonicalJson } from './canonical-json';
import { addFit, refuseBlind, wakeFit } from './fits';
import { refuseArchived } from './notebook-archive';
import { tellNotebook } from './notebook-presence';
import { carryCuts, changedSections, settleSettings } from './notebook-settings';

/** Fits that came to their end by themselves: their settings are worth repeating. */
const finished = ['converged', 'budget-spent'];

/** The notebook of `access` locked, with what stands and the version that it is to rest on. */
async function lockMove(access: Access, wanted: number, transaction: Transaction) {
  // The group first, as deleting a version locks it: what is taken up can't go away meanwhile.
  await Group.findByPk(access.groupId, { attributes: ['id'], lock: true, transaction });
  const notebook = await Notebook.findByPk(access.id, { lock: true, transaction });
  if (!notebook) throw notFound('notebook');
  const [standing, present] = await Promise.all([
    NotebookRevision.findOne({
      where: { notebookId: notebook.id, revision: notebook.revision },
      transaction,
    }),
    MeasurementVersion.findByPk(notebook.measurementVersionId, {
      attributes: ['id', 'version', 'measurementId'],
      transaction,
    }),
  ]);
  const measurement = present && (await Measurement.findByPk(present.measurementId, { transaction }));
  if (!standing || !present || !measurement) throw notFound('notebook');
  if (present.version === wanted) {
    throw new AppError('conflict', `The notebook rests on version ${wanted} already; nothing was changed.`);
  }
  const version = await MeasurementVersion.findOne({
    where: { measurementId: measurement.id, version: wanted },
    transaction,
  });
  if (!version) {
    const message = `${measurement.name} has no version ${wanted}.`;
    throw new AppError('invalid', message, [{ path: 'version', message }]);
  }
  return { notebook, standing, present, measurement, version };
}

/** Finished fits on a version, the last of those that froze the very same. */
async function fitsToRepeat(notebookId: string, versionId: string, transaction: Transaction): Promise<Fit[]> {
  const fits = await Fit.findAll({
    where: { notebookId, measurementVersionId: versionId, status: finished },
    attributes: { exclude: ['report'] },
    order: [['number', 'ASC']],
    transaction,
  });
  const bySnapshot = new Map(fits.map((fit) => [fit.snapshotSha256, fit]));
  return [...bySnapshot.values()].sort((a, b) => a.number - b.number);
}

/** Settings as they are on another version: all that was chosen and is there stays, the template as the program has it now. */
function settledOn(
  version: MeasurementVersion,
  { cuts: before, likelihood, template, priors }: NotebookSettings,
  measurement: Measurement,
): NotebookSettings {
  const { id, options } = template;
  const { cuts } = carryCuts(version, before);
  return settleSettings(
    version,
    { cuts, likelihood, template: { id, options }, given: {}, kept: priors },
    measurement,
  );
}

/** How a fit was started: with the same seed, chains, budget and target its repetition differs by the data alone. */
function startOf(fit: Fit): { settings: NotebookSettings; body: StartFit } {
  const { cuts, likelihood, template, priors, seed, replicas } = snapshotSchema.parse(fit.snapshot);
  return {
    settings: { cuts, likelihood, template, priors },
    body: {
      seed,
      replicas,
      maxDraws: fit.maxDraws,
      target: { rhat: fit.targetRhat, ess: fit.targetEss },
    },
  };
}

interface Repetition {
  fit: Fit;
  settings: NotebookSettings;
  body: StartFit;
}

function planRepetitions(
  fits: readonly Fit[],
  version: MeasurementVersion,
  measurement: Measurement,
): { planned: Repetition[]; skipped: TakenUp['skipped'] } {
  const planned: Repetition[] = [];
  const skipped: TakenUp['skipped'] = [];
  for (const fit of fits) {
    const { settings, body } = startOf(fit);
    try {
      planned.push({ fit, settings: settledOn(version, settings, measurement), body });
    } catch (error) {
      if (!(error instanceof AppError)) throw error;
      skipped.push({ number: fit.number, reason: error.message });
    }
  }
  return { planned, skipped };
}

/**
 * Moves the notebook of `access` to another version of its measurement, as a new revision, and queues a repetition of
 * every finished fit of the version that it rested on: all in one transaction. A fit whose settings aren't those that
 * stand gets a revision of its own before, so that each fit belongs to the revision whose settings it froze. `invalid`
 * where the standing settings can't be fitted to that version.
 */
export async function takeUpVersion(access: Access, { version: wanted }: TakeUp): Promise<TakenUp> {
  access.require('notebook.edit');
  access.require('fit.start');
  const { actor, groupId } = access;
  const answer = await database().transaction(async (transaction): Promise<TakenUp> => {
    const found = await lockMove(access, wanted, transaction);
    const { notebook, standing, present, measurement, version } = found;
    refuseArchived(notebook);
    refuseBlind(measurement);
    const kept = settledOn(version, standing.settings, measurement);
    const fits = await fitsToRepeat(notebook.id, present.id, transaction);
    const { planned, skipped } = planRepetitions(fits, version, measurement);
    const now = new Date();
    const revisions = new Map<string, number>();
    let last = { title: notebook.title, settings: standing.settings };
    let revision = notebook.revision;
    const write = async (settings: NotebookSettings) => {
      const moved: NotebookSection[] = revision === notebook.revision ? ['measurement'] : [];
      const next = { title: notebook.title, settings };
      const sections = [...new Set([...moved, ...changedSections(last, next)])];
      last = next;
      revision += 1;
      revisions.set(canonicalJson(settings), revision);
      await NotebookRevision.create(
        {
          notebookId: notebook.id,
          revision,
          title: notebook.title,
          settings,
          sections,
          createdBy: actor.userId,
          createdAt: now,
        },
        { transaction },
      );
    };
    for (const { settings } of planned) {
      const key = canonicalJson(settings);
      if (key !== canonicalJson(kept) && !revisions.has(key)) await write(settings);
    }
    await write(kept);
    await notebook.update(
      { revision, measurementVersionId: version.id, updatedBy: actor.userId, updatedAt: now },
      { transaction },
    );
    const made: TakenUp['fits'] = [];
    for (const { fit, settings, body } of planned) {
      const origin = {
        notebook,
        version,
        settings,
        revision: revisions.get(canonicalJson(settings)) ?? revision,
        repeats: fit,
      };
      const { id, number } = await addFit(access, origin, body, transaction);
      made.push({ id, number, repeats: fit.number });
    }
    await recordEvent(
      {
        groupId,
        actorId: actor.userId,
        action: 'notebook.take-up',
        subjectType: 'notebook',
        subjectId: notebook.id,
        details: { revision, from: present.version, to: wanted, fits: made.map(({ number }) => number) },
      },
      transaction,
    );
    const { id, number, title } = notebook;
    const { dropped } = carryCuts(version, standing.settings.cuts);
    return { id, number, title, version: wanted, revision, fits: made, skipped, dropped };
  });
  for (const { id } of answer.fits) await wakeFit(id, 0);
  void tellNotebook(answer.id);
  return answer;
}

/**
 * The same for every notebook that rests on another version of the measurement of `access`, each in a transaction of
 * its own: one that can't be fitted to the version stays where it is, with the reason.
 */
export async function takeUpEverywhere(access: Access, body: TakeUp): Promise<AllTakenUp> {
  access.require('notebook.edit');
  access.require('fit.start');
  const versions = await MeasurementVersion.findAll({
    where: { measurementId: access.id },
    attributes: ['id', 'version'],
  });
  if (!versions.some(({ version }) => version === body.version)) {
    const message = `The measurement has no version ${body.version}.`;
    throw new AppError('invalid', message, [{ path: 'version', message }]);
  }
  const older = versions.filter(({ version }) => version !== body.version).map(({ id }) => id);
  const notebooks = await Notebook.findAll({
    where: { measurementVersionId: older, archivedAt: null },
    order: [['number', 'ASC']],
  });
  const answer: AllTakenUp = { notebooks: [], refused: [] };
  for (const { id, number, title } of notebooks) {
    try {
      const one = await authorise(access.actor, 'notebook', id, 'notebook.edit');
      answer.notebooks.push(await takeUpVersion(one, body));
    } catch (error) {
      if (!(error instanceof AppError) || error.blame === 'ours') throw error;
      answer.refused.push({ id, number, title, reason: error.message });
    }
  }
  return answer;
}
