import { isDeepStrictEqual } from 'node:util';
import type { Transaction } from 'sequelize';
import {
  Group,
  Measurement,
  MeasurementVersion,
  Notebook,
  NotebookRevision,
  type NotebookOrigin,
  type NotebookSettings,
} from '@/models';
import { database } from '@/lib/db';
import { AppError, notFound } from '@/lib/errors';
import { presentNotebookCreated } from '@/lib/presenters/notebooks';
import {
  notebookSections,
  type AlsoMeasurement,
  type CreateNotebook,
  type NotebookCreated,
  type Notebook as NotebookAnswer,
  type PatchNotebook,
} from '@/lib/schemas';
import type { Access } from './access';
import { recordEvent } from './audit';
import { refuseArchived } from './notebook-archive';
import { tellNotebook } from './notebook-presence';
import { readNotebook } from './notebook-records';
import { chooseAlso, measuredTogether, measurementsOf, restOn } from './measured-together';
import { carryPriors, changedSections, settleSettings, type SettingsDraft } from './notebook-settings';
import { checkStatement, statementAt } from './statements';

export { notebookSummaries, readNotebook } from './notebook-records';

/** A measurement of the group in its newest version; one of another group is answered as if there were none. */
export async function findMeasured(groupId: string, id: string) {
  const measurement = await Measurement.findOne({ where: { id, groupId } });
  const version =
    measurement &&
    (await MeasurementVersion.findOne({ where: { measurementId: id }, order: [['version', 'DESC']] }));
  if (measurement && version) return { measurement, version };
  const { code, message } = notFound('measurement');
  throw new AppError(code, message, [{ path: 'measurement', message }]);
}

/** A notebook that is about to be stored, its settings settled on the version. */
export interface NewNotebook {
  title: string;
  settings: NotebookSettings;
  measurement: Measurement;
  version: MeasurementVersion;
  origin: NotebookOrigin | null;
}

/** Stores a notebook with its first revision; it takes the group's next number. */
export async function insertNotebook(
  { groupId, actor }: Access,
  { title, settings, measurement, version, origin }: NewNotebook,
): Promise<Notebook> {
  return database().transaction(async (transaction) => {
    // Numbers count up within the group: its row is locked, so that two notebooks at once get two numbers.
    await Group.findByPk(groupId, { attributes: ['id'], lock: true, transaction });
    // It may have been deleted since it was read.
    if (!(await MeasurementVersion.findByPk(version.id, { attributes: ['id'], transaction }))) {
      throw notFound('measurement');
    }
    const last = await Notebook.max<number, Notebook>('number', { where: { groupId }, transaction });
    const now = new Date();
    const made = await Notebook.create(
      {
        groupId,
        number: (last ?? 0) + 1,
        title: title,
        revision: 1,
        measurementVersionId: version.id,
        createdBy: actor.userId,
        createdAt: now,
        updatedBy: actor.userId,
        updatedAt: now,
        origin,
      },
      { transaction },
    );
    await NotebookRevision.create(
      {
        notebookId: made.id,
        revision: 1,
        title: title,
        settings,
        sections: notebookSections.filter((section) => section !== 'statement'),
        createdBy: actor.userId,
        createdAt: now,
      },
      { transaction },
    );
    await restOn(made.id, settings.also, transaction);
    await recordEvent(
      {
        groupId,
        actorId: actor.userId,
        action: 'notebook.create',
        subjectType: 'notebook',
        subjectId: made.id,
        details: {
          number: made.number,
          measurement: measurement.id,
          version: version.version,
          ...(settings.also ? { measurements: settings.also.length + 1 } : {}),
          ...(origin ? { origin } : {}),
        },
      },
      transaction,
    );
    return made;
  });
}

/**
 * Opens a notebook in the group of `access` on the newest version of a measurement. What is left out gets its
 * default; settings that can't be fitted are refused.
 */
export async function createNotebook(access: Access, body: CreateNotebook): Promise<NotebookCreated> {
  access.require('notebook.create');
  const { measurement, version } = await findMeasured(access.groupId, body.measurement);
  const draft = {
    cuts: body.cuts ?? {},
    likelihood: body.likelihood,
    template: body.template,
    given: body.priors ?? {},
    kept: {},
    also: await chooseAlso(access.groupId, measurement, body.alsoMeasurements ?? [], []),
    sharedMocks: body.sharedMocks,
  };
  const measured = await measuredTogether(version, chosenOf(draft));
  const settings = settleSettings(measured.numbers, draft, measured);
  const notebook = await insertNotebook(access, {
    title: body.title,
    settings,
    measurement,
    version,
    origin: null,
  });
  return presentNotebookCreated(notebook, measured);
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

/** Further measurements of a draft as settings have them. */
const chosenOf = ({ also, sharedMocks }: SettingsDraft) => ({
  also,
  ...(sharedMocks ? { sharedMocks: true as const } : {}),
});

/** What a new revision is to say. */
export interface RevisionDraft {
  title: string;
  draft: Omit<SettingsDraft, 'also' | 'sharedMocks'>;
  /** The settings whose priors the draft keeps; other measurements than theirs have those priors under other names. */
  from: NotebookSettings;
  /** Further measurements; left out, those that stand. */
  alsoMeasurements?: readonly AlsoMeasurement[];
  sharedMocks?: boolean;
  /** The group's words; left out, they stay. */
  statement?: string;
}

/**
 * A revision's draft with its further measurements. Priors go with the measurements that they belong to, and bin averaging gives way
 * where the measurements are others: one of them may have no edges.
 */
async function withFurther(
  { draft, from, alsoMeasurements, sharedMocks }: RevisionDraft,
  standing: NotebookSettings,
  own: Measurement,
  transaction: Transaction,
): Promise<SettingsDraft> {
  const before = standing.also ?? [];
  const also = alsoMeasurements
    ? await chooseAlso(own.groupId, own, alsoMeasurements, before, transaction)
    : before;
  const was = await measurementsOf(own, from.also, transaction);
  const now = await measurementsOf(own, also, transaction);
  const together =
    also.length > 0 ? { also, sharedMocks: sharedMocks ?? standing.sharedMocks } : { sharedMocks };
  if (isDeepStrictEqual(was, now)) return { ...draft, ...together };
  const { binAverage, ...options } = draft.template.options;
  return {
    ...draft,
    template: { ...draft.template, options: binAverage === false ? { ...options, binAverage } : options },
    kept: carryPriors(draft.kept, was, now),
    ...together,
  };
}

/**
 * Makes a new revision of the notebook of `access`, drafted from the one that stands, with the sections in which it differs;
 * where it differs in nothing the notebook stays as it is. `stale_revision` unless `named` is the revision that stands.
 */
export async function addRevision(
  access: Access,
  named: number,
  restoredFrom: number | null,
  draftFrom: (standing: NotebookRevision, notebook: Notebook) => RevisionDraft | Promise<RevisionDraft>,
): Promise<NotebookAnswer> {
  access.require('notebook.edit');
  const { groupId, actor } = access;
  await database().transaction(async (transaction) => {
    const { notebook, standing, version, measurement } = await lockNotebook(access.id, transaction);
    refuseArchived(notebook);
    if (named !== notebook.revision) refuseStale(named, standing);
    const made = await draftFrom(standing, notebook);
    const { title, statement: written } = made;
    const draft = await withFurther(made, standing.settings, measurement, transaction);
    const measured = await measuredTogether(version, chosenOf(draft), transaction);
    const settings = settleSettings(measured.numbers, draft, measured);
    const words = await statementAt(notebook.id, notebook.revision, transaction);
    const statement = written === words ? undefined : written;
    if (statement !== undefined) await checkStatement(notebook.id, statement, transaction);
    const sections = [
      ...changedSections({ title: notebook.title, settings: standing.settings }, { title, settings }),
      ...(statement === undefined ? [] : (['statement'] as const)),
    ];
    if (sections.length === 0) return;
    const now = new Date();
    const revision = notebook.revision + 1;
    await NotebookRevision.create(
      {
        notebookId: notebook.id,
        revision,
        title,
        settings,
        statement: statement ?? null,
        sections,
        restoredFrom,
        createdBy: actor.userId,
        createdAt: now,
      },
      { transaction },
    );
    await notebook.update({ title, revision, updatedBy: actor.userId, updatedAt: now }, { transaction });
    await restOn(notebook.id, settings.also, transaction);
    await recordEvent(
      {
        groupId,
        actorId: actor.userId,
        action: 'notebook.edit',
        subjectType: 'notebook',
        subjectId: notebook.id,
        details: { revision, sections, ...(restoredFrom === null ? {} : { restoredFrom }) },
      },
      transaction,
    );
  });
  void tellNotebook(access.id);
  return readNotebook(access);
}

/** The likelihood that stands, or the default of the measurements where others are taken together. */
const likelihoodAfter = (before: NotebookSettings, { alsoMeasurements, sharedMocks }: PatchNotebook) =>
  (alsoMeasurements && alsoMeasurements.length !== (before.also ?? []).length) ||
  (sharedMocks !== undefined && sharedMocks !== (before.sharedMocks ?? false))
    ? undefined
    : before.likelihood;

/**
 * Edits the notebook of `access`: what the body leaves out stays. With another template, priors of parameters that
 * stay are kept, new ones get their default, others go. `stale_revision` unless the body names the revision that stands.
 */
export function patchNotebook(access: Access, body: PatchNotebook): Promise<NotebookAnswer> {
  return addRevision(access, body.revision, null, ({ settings: before }, { title }) => ({
    title: body.title ?? title,
    draft: {
      cuts: body.cuts ?? before.cuts,
      likelihood: body.likelihood ?? likelihoodAfter(before, body),
      template: body.template ?? before.template,
      given: body.priors ?? {},
      kept: before.priors,
    },
    from: before,
    alsoMeasurements: body.alsoMeasurements,
    sharedMocks: body.sharedMocks,
    statement: body.statement,
  }));
}
