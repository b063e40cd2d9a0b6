import { Fit, Notebook } from '@/models';
import { database } from '@/lib/db';
import { AppError, notFound } from '@/lib/errors';
import { endedStatuses, type Notebook as NotebookAnswer } from '@/lib/schemas';
import { Op, ForeignKeyConstraintError, type Transaction } from 'sequelize';
import type { Access } from './access';
import { recordEvent } from './audit';
import { tellNotebook } from './notebook-presence';
import { readNotebook } from './notebook-records';

/** Refuses a change of a notebook that was put away. */
export function refuseArchived({ archivedAt }: Pick<Notebook, 'archivedAt'>): void {
  if (archivedAt === null) return;
  throw new AppError(
    'conflict',
    'The notebook is archived: it is read and copied, but not changed. A lead can take it back into use.',
  );
}

async function lock(access: Access, transaction: Transaction): Promise<Notebook> {
  const notebook = await Notebook.findByPk(access.id, { lock: true, transaction });
  if (!notebook) throw notFound('notebook');
  return notebook;
}

const log = (
  { groupId, actor }: Access,
  { id, number, title }: Notebook,
  action: string,
  transaction: Transaction,
) =>
  recordEvent(
    {
      groupId,
      actorId: actor.userId,
      action,
      subjectType: 'notebook',
      subjectId: id,
      details: { number, title },
    },
    transaction,
  );

async function refuseRunning(notebookId: string, transaction: Transaction): Promise<void> {
  const running = await Fit.findOne({
    where: { notebookId, status: { [Op.notIn]: [...endedStatuses] } },
    attributes: ['number'],
    transaction,
  });
  if (running) {
    throw new AppError('conflict', `Fit ${running.number} is still running: stop it first, or let it end.`);
  }
}

/**
 * Puts the notebook of `access` away: what was tried stays, with its fits and its record, and can be read. Once put away it
 * stays so; asking again changes nothing.
 */
export async function archiveNotebook(access: Access): Promise<NotebookAnswer> {
  access.require('notebook.archive');
  await database().transaction(async (transaction) => {
    const notebook = await lock(access, transaction);
    if (notebook.archivedAt !== null) return;
    await refuseRunning(notebook.id, transaction);
    await notebook.update({ archivedAt: new Date(), archivedBy: access.actor.userId }, { transaction });
    await log(access, notebook, 'notebook.archive', transaction);
  });
  void tellNotebook(access.id);
  return readNotebook(access);
}

/** Takes the notebook of `access` back into use. */
export async function unarchiveNotebook(access: Access): Promise<NotebookAnswer> {
  access.require('notebook.archive');
  await database().transaction(async (transaction) => {
    const notebook = await lock(access, transaction);
    if (notebook.archivedAt === null) return;
    await notebook.update({ archivedAt: null, archivedBy: null }, { transaction });
    await log(access, notebook, 'notebook.unarchive', transaction);
  });
  void tellNotebook(access.id);
  return readNotebook(access);
}

/**
 * Erases the notebook of `access`, in which nothing was ever tried. One with a fit is refused (`conflict`): what was tried
 * and given up counts when a significance is judged, so it is archived instead.
 */
export async function deleteNotebook(access: Access): Promise<{ id: string }> {
  access.require('notebook.delete');
  const kept = () =>
    new AppError(
      'conflict',
      'Something was tried in this notebook, so it isn’t erased: archive it. What was tried stays on record.',
    );
  try {
    await database().transaction(async (transaction) => {
      const notebook = await lock(access, transaction);
      if ((await Fit.count({ where: { notebookId: notebook.id }, transaction })) > 0) throw kept();
      await log(access, notebook, 'notebook.delete', transaction);
      await notebook.destroy({ transaction });
    });
  } catch (error) {
    if (error instanceof ForeignKeyConstraintError) throw kept();
    throw error;
  }
  void tellNotebook(access.id);
  return { id: access.id };
}
