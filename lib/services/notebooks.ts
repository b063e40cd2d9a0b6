import type { Transaction } from 'sequelize';
import { Group, Measurement, MeasurementVersion, Notebook, NotebookRevision } from '@/models';
import { database } from '@/lib/db';
import { AppError, notFound } from '@/lib/errors';
import { presentNotebookCreated } from '@/lib/presenters/notebooks';
import {
  notebookSections,
  type CreateNotebook,
  type NotebookCreated,
  type Notebook as NotebookAnswer,
  type PatchNotebook,
} from '@/lib/schemas';
import type { Access } from './access';
import { recordEvent } from './audit';
import { readNotebook } from './notebook-records';
import { changedSections, settleSettings } from './notebook-settings';

export { notebookSummaries, readNotebook } from './notebook-records';

/** A measurement of the group in its newest version; one of another group is answered as if there were none. */
async function findMeasured(groupId: string, id: string) {
  const measurement = await Measurement.findOne({ where: { id, groupId } });
  const version =
    measurement &&
    (await MeasurementVersion.findOne({ where: { measurementId: id }, order: [['version', 'DESC']] }));
  if (measurement && version) return { measurement, version };
  const { code, message } = notFound('measurement');
  throw new AppError(code, message, [{ path: 'measurement', message }]);
}

/**
 * Opens a notebook in the group of `access` on the newest version of a measurement. What is left out gets its
 * default; settings that can't be fitted are refused.
 */
export async function createNotebook(access: Access, body: CreateNotebook): Promise<NotebookCreated> {
  access.require('notebook.create');
  const { groupId, actor } = access;
  const { measurement, version } = await findMeasured(groupId, body.measurement);
  const draft = {
    cuts: body.cuts ?? {},
    likelihood: body.likelihood,
    template: body.template,
    given: body.priors ?? {},
    kept: {},
  };
  const settings = settleSettings(version, draft, measurement);
  const notebook = await database().transaction(async (transaction) => {
    // Numbers count up within the group: its row is locked, so that two notebooks at once get two numbers.
    await Group.findByPk(groupId, { attributes: ['id'], lock: true, transaction });
    const last = await Notebook.max<number, Notebook>('number', { where: { groupId }, transaction });
    const now = new Date();
    const made = await Notebook.create(
      {
        groupId,
        number: (last ?? 0) + 1,
        title: body.title,
        revision: 1,
        measurementVersionId: version.id,
        createdBy: actor.userId,
        createdAt: now,
        updatedBy: actor.userId,
        updatedAt: now,
      },
      { transaction },
    );
    await NotebookRevision.create(
      {
        notebookId: made.id,
        revision: 1,
        title: body.title,
        settings,
        sections: [...notebookSections],
        createdBy: actor.userId,
        createdAt: now,
      },
      { transaction },
    );
    await recordEvent(
      {
        groupId,
        actorId: actor.userId,
        action: 'notebook.create',
        subjectType: 'notebook',
        subjectId: made.id,
        details: { number: made.number, measurement: measurement.id, version: version.version },
      },
      transaction,
    );
    return made;
  });
  return presentNotebookCreated(notebook, measurement);
}

function refuseStale(named: number, standing: NotebookRevision): never {
  throw new AppError(
    'stale_revision',
    `You edited revision ${named}, but revision ${standing.revision} stands now. Read the notebook again and repeat the change.`,
    [
      { path: 'revision', message: `${named} was edited` },
      {
        path: 'notebook.revision',
        message: `${standing.revision} stands, since ${standing.createdAt.toISOString()}`,
      },
    ],
  );
}

/** Loads a notebook with its standing revision, locked against other edits. */
async function lockNotebook(id: string, transaction: Transaction) {
  const notebook = await Notebook.findByPk(id, { lock: true, transaction });
  if (!notebook) throw notFound('notebook');
  const standing = await NotebookRevision.findOne({
    where: { notebookId: id, revision: notebook.revision },
    transaction,
  });
  const version = await MeasurementVersion.findByPk(notebook.measurementVersionId, { transaction });
  const measurement = version && (await Measurement.findByPk(version.measurementId, { transaction }));
  if (!standing || !version || !measurement) throw notFound('notebook');
  return { notebook, standing, version, measurement };
}

/**
 * Edits the notebook of `access`: what the body leaves out stays. With another template, priors of parameters that
 * stay are kept, new ones get their default, others go. A change makes a new revision with the sections that it
 * touched; without one the notebook stays as it is. `stale_revision` unless the body names the revision that stands.
 */
export async function patchNotebook(access: Access, body: PatchNotebook): Promise<NotebookAnswer> {
  access.require('notebook.edit');
  const { groupId, actor } = access;
  await database().transaction(async (transaction) => {
    const { notebook, standing, version, measurement } = await lockNotebook(access.id, transaction);
    if (body.revision !== notebook.revision) refuseStale(body.revision, standing);
    const before = standing.settings;
    const title = body.title ?? notebook.title;
    const settings = settleSettings(
      version,
      {
        cuts: body.cuts ?? before.cuts,
        likelihood: body.likelihood ?? before.likelihood,
        template: body.template ?? before.template,
        given: body.priors ?? {},
        kept: before.priors,
      },
      measurement,
    );
    const sections = changedSections({ title: notebook.title, settings: before }, { title, settings });
    if (sections.length === 0) return;
    const now = new Date();
    const revision = notebook.revision + 1;
    await NotebookRevision.create(
      {
        notebookId: notebook.id,
        revision,
        title,
        settings,
        sections,
        createdBy: actor.userId,
        createdAt: now,
      },
      { transaction },
    );
    await notebook.update({ title, revision, updatedBy: actor.userId, updatedAt: now }, { transaction });
    await recordEvent(
      {
        groupId,
        actorId: actor.userId,
        action: 'notebook.edit',
        subjectType: 'notebook',
        subjectId: notebook.id,
        details: { revision, sections },
      },
      transaction,
    );
  });
  return readNotebook(access);
}
