import { isDeepStrictEqual } from 'node:util';
import { Op, type Transaction } from 'sequelize';
import {
  Fit,
  FitPart,
  Group,
  MeasurementVersion,
  Notebook,
  NotebookPart,
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
import { alsoOfFit, measuredTogether, restOn, type MeasuredTogether } from './measured-together';
import { refuseArchived } from './notebook-archive';
import { tellNotebook } from './notebook-presence';
import { carryCuts, changedSections, settleSettings } from './notebook-settings';

/** Fits that came to their end by themselves: their settings are worth repeating. */
const finished = ['converged', 'budget-spent'];

/** The notebook of `access` locked, with what stands and the version that one of its measurements is to rest on. */
async function lockMove(
  access: Access,
  { version: wanted, measurement: which }: TakeUp,
  transaction: Transaction,
) {
  // The group first, as deleting a version locks it: what is taken up can't go away meanwhile.
  await Group.findByPk(access.groupId, { attributes: ['id'], lock: true, transaction });
  const notebook = await Notebook.findByPk(access.id, { lock: true, transaction });
  if (!notebook) throw notFound('notebook');
  const [standing, first] = await Promise.all([
    NotebookRevision.findOne({
      where: { notebookId: notebook.id, revision: notebook.revision },
      transaction,
    }),
    MeasurementVersion.findByPk(notebook.measurementVersionId, { transaction }),
  ]);
  if (!standing || !first) throw notFound('notebook');
  const { parts } = await measuredTogether(first, standing.settings, transaction, 'parameters');
  const place = which === undefined ? 0 : parts.findIndex(({ measurement }) => measurement.id === which);
  if (place < 0) {
    const message = 'The notebook doesn’t rest on that measurement.';
    throw new AppError('invalid', message, [{ path: 'measurement', message }]);
  }
  const { version: present, measurement } = parts[place];
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
  return { notebook, standing, parts, move: { place, version } };
}

/** The versions of a notebook's measurements, one of them moved to another version. */
interface Move {
  place: number;
  version: MeasurementVersion;
}

/** Finished fits on these versions, the last of those that froze the very same. */
async function fitsToRepeat(
  notebookId: string,
  versionIds: readonly string[],
  transaction: Transaction,
): Promise<Fit[]> {
  const [first, ...further] = versionIds;
  const fits = await Fit.findAll({
    where: { notebookId, measurementVersionId: first, status: finished },
    attributes: { exclude: ['report'] },
    order: [['number', 'ASC']],
    transaction,
  });
  const parts = await FitPart.findAll({
    where: { fitId: fits.map(({ id }) => id) },
    order: [['place', 'ASC']],
    transaction,
  });
  const same = fits.filter(({ id }) =>
    isDeepStrictEqual(
      parts.filter(({ fitId }) => fitId === id).map(({ measurementVersionId }) => measurementVersionId),
      further,
    ),
  );
  const bySnapshot = new Map(same.map((fit) => [fit.snapshotSha256, fit]));
  return [...bySnapshot.values()].sort((a, b) => a.number - b.number);
}

/** Settings as they are after the move: all that was chosen and is there stays, the template as the program has it now. */
async function settledOn(
  { place, version }: Move,
  first: MeasurementVersion,
  { cuts: before, likelihood, template, priors, also, sharedMocks }: NotebookSettings,
  transaction: Transaction,
): Promise<{ settings: NotebookSettings; measured: MeasuredTogether }> {
  const { id, options } = template;
  const own = place === 0 ? version : first;
  const moved = also?.map((part, k) =>
    k + 1 === place ? { version: version.id, cuts: carryCuts(version, part.cuts).cuts } : part,
  );
  const { cuts } = carryCuts(own, before);
  const measured = await measuredTogether(
    own,
    { also: moved, ...(sharedMocks ? { sharedMocks } : {}) },
    transaction,
  );
  const settings = settleSettings(
    measured.numbers,
    { cuts, likelihood, template: { id, options }, given: {}, kept: priors, also: moved, sharedMocks },
    measured,
  );
  return { settings, measured };
}

/** How a fit was started: with the same seed, chains, budget and target its repetition differs by the data alone. */
async function startOf(
  fit: Fit,
  transaction: Transaction,
): Promise<{ settings: NotebookSettings; body: StartFit }> {
  const snapshot = snapshotSchema.parse(fit.snapshot);
  const { cuts, likelihood, template, priors, seed, replicas } = snapshot;
  return {
    settings: { cuts, likelihood, template, priors, ...(await alsoOfFit(fit.id, snapshot, transaction)) },
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
  measured: MeasuredTogether;
  body: StartFit;
}

async function planRepetitions(
  fits: readonly Fit[],
  move: Move,
  first: MeasurementVersion,
  transaction: Transaction,
): Promise<{ planned: Repetition[]; skipped: TakenUp['skipped'] }> {
  const planned: Repetition[] = [];
  const skipped: TakenUp['skipped'] = [];
  for (const fit of fits) {
    const { settings, body } = await startOf(fit, transaction);
    try {
      planned.push({ fit, ...(await settledOn(move, first, settings, transaction)), body });
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
export async function takeUpVersion(access: Access, wanted: TakeUp): Promise<TakenUp> {
  access.require('notebook.edit');
  access.require('fit.start');
  const { actor, groupId } = access;
  const answer = await database().transaction(async (transaction): Promise<TakenUp> => {
    const found = await lockMove(access, wanted, transaction);
    const { notebook, standing, parts, move } = found;
    refuseArchived(notebook);
    for (const { measurement } of parts) refuseBlind(measurement);
    const [{ version: first }] = parts;
    const { settings: kept } = await settledOn(move, first, standing.settings, transaction);
    const fits = await fitsToRepeat(
      notebook.id,
      parts.map(({ version }) => version.id),
      transaction,
    );
    const { planned, skipped } = await planRepetitions(fits, move, first, transaction);
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
      {
        revision,
        measurementVersionId: move.place === 0 ? move.version.id : first.id,
        updatedBy: actor.userId,
        updatedAt: now,
      },
      { transaction },
    );
    await restOn(notebook.id, kept.also, transaction);
    const made: TakenUp['fits'] = [];
    for (const { fit, settings, measured, body } of planned) {
      const origin = {
        notebook,
        measured,
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
        details: {
          revision,
          ...(move.place > 0 ? { measurement: parts[move.place].measurement.id } : {}),
          from: parts[move.place].version.version,
          to: wanted.version,
          fits: made.map(({ number }) => number),
        },
      },
      transaction,
    );
    const { id, number, title } = notebook;
    const { cuts, also = [] } = standing.settings;
    const { dropped } = carryCuts(move.version, move.place === 0 ? cuts : also[move.place - 1].cuts);
    return { id, number, title, version: wanted.version, revision, fits: made, skipped, dropped };
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
  const parts = await NotebookPart.findAll({ where: { measurementVersionId: older } });
  const further = new Set(parts.map(({ notebookId }) => notebookId));
  const notebooks = await Notebook.findAll({
    where: { [Op.or]: [{ measurementVersionId: older }, { id: [...further] }], archivedAt: null },
    order: [['number', 'ASC']],
  });
  const answer: AllTakenUp = { notebooks: [], refused: [] };
  for (const { id, number, title } of notebooks) {
    try {
      const one = await authorise(access.actor, 'notebook', id, 'notebook.edit');
      answer.notebooks.push(
        await takeUpVersion(one, further.has(id) ? { ...body, measurement: access.id } : body),
      );
    } catch (error) {
      if (!(error instanceof AppError) || error.blame === 'ours') throw error;
      answer.refused.push({ id, number, title, reason: error.message });
    }
  }
  return answer;
}
