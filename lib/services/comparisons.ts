import type { Transaction } from 'sequelize';
import { Fit, NotebookRevision, type NotebookSettings } from '@/models';
import { database } from '@/lib/db';
import { AppError } from '@/lib/errors';
import {
  defaultFieldCounts,
  snapshotSchema,
  type ComparisonStarted,
  type Snapshot,
  type StartComparison,
} from '@/lib/schemas';
import { fieldCount } from '@/lib/templates';
import type { Access } from './access';
import { recordEvent } from './audit';
import { canonicalJson } from './canonical-json';
import { withFieldCount, withoutFamily } from './field-counts';
import { addFit, freeze, lockNotebook, refuseBlind, wakeFit } from './fits';
import { refuseArchived } from './notebook-archive';
import type { MeasuredTogether } from './measured-together';
import { tellNotebook } from './notebook-presence';
import { changedSections } from './notebook-settings';

/** Fits that give an evidence by themselves: under way, or come to their end. */
const reusable = ['queued', 'warming-up', 'sampling', 'converged', 'budget-spent'];

interface Planned {
  fields: number;
  settings: NotebookSettings;
  /** The fit of the very same snapshot that there is already. */
  known: Fit | null;
}

/** A snapshot as a text to compare; the seed counts only where one is asked for, since else each fit draws its own. */
const alike = (snapshot: Snapshot, seeded: boolean): string =>
  canonicalJson(seeded ? snapshot : { ...snapshot, seed: null });

async function knownFits(
  notebookId: string,
  versionId: string,
  seeded: boolean,
  transaction: Transaction,
): Promise<Map<string, Fit>> {
  const fits = await Fit.findAll({
    where: { notebookId, measurementVersionId: versionId, status: reusable },
    attributes: { exclude: ['report'] },
    order: [['number', 'ASC']],
    transaction,
  });
  return new Map(fits.map((fit) => [alike(snapshotSchema.parse(fit.snapshot), seeded), fit]));
}

/** Settings of every number of fields, with the fit that has them already; those that can't be fitted are left out with the reason. */
function plan(
  measured: MeasuredTogether,
  settings: NotebookSettings,
  body: StartComparison,
  known: ReadonlyMap<string, Fit>,
): { planned: Planned[]; skipped: ComparisonStarted['skipped'] } {
  const counts = [...new Set(body.fields ?? defaultFieldCounts)].sort((a, b) => a - b);
  const planned: Planned[] = [];
  const skipped: ComparisonStarted['skipped'] = [];
  for (const fields of counts) {
    try {
      const changed = withFieldCount(measured.numbers, settings, fields, measured);
      const snapshot = alike(freeze(measured, changed, body), body.seed !== undefined);
      planned.push({ fields, settings: changed, known: known.get(snapshot) ?? null });
    } catch (error) {
      if (!(error instanceof AppError) || error.blame === 'ours') throw error;
      skipped.push({ fields, reason: error.message });
    }
  }
  return { planned, skipped };
}

/**
 * Queues fits of the notebook of `access` that differ in the number of fields alone, in one transaction; a fit of the same
 * snapshot that is under way or has ended by itself is taken instead of a new one, so that asking twice changes nothing. Fits with
 * another number of fields than the notebook's get revisions of their own, after which the standing settings are brought back.
 */
export async function startComparison(access: Access, body: StartComparison): Promise<ComparisonStarted> {
  access.require('fit.start');
  const { actor, groupId } = access;
  const done = await database().transaction(async (transaction) => {
    const { notebook, revision: standing, version, measured } = await lockNotebook(access, transaction);
    refuseArchived(notebook);
    refuseBlind(measured);
    const { settings } = standing;
    const refusal = withoutFamily(settings);
    if (refusal !== null) {
      throw new AppError('invalid', refusal, [{ path: 'template.options.fields', message: refusal }]);
    }
    const known = await knownFits(notebook.id, version.id, body.seed !== undefined, transaction);
    const { planned, skipped } = plan(measured, settings, body, known);
    const own = fieldCount(settings.template.options.fields);
    const fresh = planned.filter(({ known: fit }) => fit === null);
    // The standing settings last, so that the newest fit is one of the notebook as it stands.
    const order = [...fresh.filter(({ fields }) => fields !== own), ...fresh.filter((p) => p.fields === own)];

    const now = new Date();
    let revision = notebook.revision;
    let last = { title: notebook.title, settings };
    const write = async (next: NotebookSettings, restoredFrom: number | null) => {
      const after = { title: notebook.title, settings: next };
      const sections = changedSections(last, after);
      last = after;
      revision += 1;
      await NotebookRevision.create(
        {
          notebookId: notebook.id,
          revision,
          title: notebook.title,
          settings: next,
          sections,
          restoredFrom,
          createdBy: actor.userId,
          createdAt: now,
        },
        { transaction },
      );
      return revision;
    };
    const revisions = new Map<number, number>();
    for (const { fields, settings: each } of order) {
      if (fields !== own) revisions.set(fields, await write(each, null));
    }
    if (revisions.size > 0) {
      await write(settings, notebook.revision);
      await notebook.update({ revision, updatedBy: actor.userId, updatedAt: now }, { transaction });
    }
    const { seed, replicas, maxDraws, target } = body;
    const start = { seed, replicas, maxDraws, target };
    const made = new Map<number, Fit>();
    for (const { fields, settings: each } of order) {
      const origin = { notebook, measured, settings: each, revision: revisions.get(fields) ?? revision };
      made.set(fields, await addFit(access, origin, start, transaction));
    }
    const fits = planned.flatMap(({ fields, known: old }) => {
      const fit = old ?? made.get(fields);
      return fit ? [{ id: fit.id, number: fit.number, fields, reused: old !== null }] : [];
    });
    if (made.size > 0) {
      await recordEvent(
        {
          groupId,
          actorId: actor.userId,
          action: 'notebook.compare',
          subjectType: 'notebook',
          subjectId: notebook.id,
          details: { fields: fits.map((fit) => fit.fields).join(', '), revision },
        },
        transaction,
      );
    }
    return { answer: { revision, fits, skipped }, made: [...made.values()].map(({ id }) => id) };
  });
  for (const id of done.made) await wakeFit(id, 0);
  if (done.made.length > 0) void tellNotebook(access.id);
  return done.answer;
}
