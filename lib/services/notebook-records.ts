import { Op } from 'sequelize';
import {
  Fit,
  Group,
  Measurement,
  MeasurementVersion,
  Notebook,
  NotebookRevision,
  type NotebookSettings,
} from '@/models';
import { notFound } from '@/lib/errors';
import { actionsFor } from '@/lib/policies';
import { presentNotebook, presentNotebookSummary, type MeasuredBy } from '@/lib/presenters/notebooks';
import { settingSections, type Notebook as NotebookAnswer, type NotebookSummary } from '@/lib/schemas';
import type { Access } from './access';
import { countKept } from './inference-spec';
import { emailsOf } from './people';
import { readOnce } from './reading';
import { versionLine, versionLines } from './version-lines';

const fitLine = [
  'id',
  'notebookId',
  'number',
  'status',
  'revision',
  'startedBy',
  'createdAt',
  'endedAt',
] as const;

/** What may still be done with an archived notebook, if the role allows it. */
const whileArchived: ReadonlySet<string> = new Set([
  'notebook.read',
  'notebook.create',
  'notebook.archive',
  'notebook.delete',
  'fit.read',
  'scan.read',
  'check.read',
]);

/** The row of the notebook of `access`. */
export async function findNotebook({ id }: Access): Promise<Notebook> {
  const notebook = await readOnce(`notebook ${id}`, () => Notebook.findByPk(id));
  if (!notebook) throw notFound('notebook');
  return notebook;
}

/** The record of a notebook, first revision first, without the settings of each. */
export const recordOf = (notebookId: string): Promise<NotebookRevision[]> =>
  readOnce(`record ${notebookId}`, () =>
    NotebookRevision.findAll({
      where: { notebookId },
      attributes: { exclude: ['settings'] },
      order: [['revision', 'ASC']],
    }),
  );

/** The notebook of `access` as it stands, with its record and its fits. */
export async function readNotebook(access: Access): Promise<NotebookAnswer> {
  access.require('notebook.read');
  const notebook = await findNotebook(access);
  const [group, version, standing, revisions, fits] = await Promise.all([
    Group.findByPk(notebook.groupId, { attributes: ['name'] }),
    versionLine(notebook.measurementVersionId),
    NotebookRevision.findOne({
      where: { notebookId: notebook.id, revision: notebook.revision },
      attributes: ['settings'],
    }),
    recordOf(notebook.id),
    Fit.findAll({
      where: { notebookId: notebook.id },
      attributes: [...fitLine],
      order: [['number', 'DESC']],
    }),
  ]);
  if (!group || !version || !standing) throw notFound('notebook');
  const { settings } = standing;
  const further = settings.also ?? [];
  const lines = await versionLines(further.map((part) => part.version));
  const also = further.flatMap(({ version: id, cuts }) => {
    const line = lines.get(id);
    return line ? [{ line, cuts }] : [];
  });
  const all = [version, ...also.map(({ line }) => line)];
  return presentNotebook({
    notebook,
    groupName: group.name,
    measurement: { ...measuredBy(version, version), id: version.measurementId },
    newestVersion: version.newest,
    settings,
    statement: revisions.findLast(({ statement }) => statement !== null)?.statement ?? '',
    bins: { kept: countKept(version, settings.cuts), all: version.rows },
    also: also.map(({ line, cuts }) => ({
      id: line.measurementId,
      name: line.name,
      version: line.version,
      newest: line.newest,
      cuts,
      bins: { kept: countKept(line, cuts), all: line.rows },
    })),
    blind: all.some(({ blind }) => blind),
    simulated: all.some(({ simulated }) => simulated),
    revisions,
    fits,
    people: await emailsOf([
      notebook.createdBy,
      ...(notebook.archivedBy === null ? [] : [notebook.archivedBy]),
      ...revisions.map(({ createdBy }) => createdBy),
      ...fits.map(({ startedBy }) => startedBy),
    ]),
    may: [
      ...actionsFor(access.role, 'notebook'),
      ...actionsFor(access.role, 'fit'),
      ...actionsFor(access.role, 'scan'),
      ...actionsFor(access.role, 'check'),
    ].filter((action) => notebook.archivedAt === null || whileArchived.has(action)),
  });
}

const measuredBy = (
  measurement: Omit<MeasuredBy, 'version'>,
  { version }: { version: number },
): MeasuredBy => ({
  id: measurement.id,
  name: measurement.name,
  version,
  blind: measurement.blind,
  simulated: measurement.simulated,
});

/** Measurements by version's id. */
async function measuredByVersion(versionIds: string[]): Promise<Map<string, MeasuredBy>> {
  const versions = await MeasurementVersion.findAll({
    where: { id: versionIds },
    attributes: ['id', 'measurementId', 'version'],
  });
  const measurements = await Measurement.findAll({
    where: { id: versions.map(({ measurementId }) => measurementId) },
  });
  const byId = new Map(measurements.map((measurement) => [measurement.id, measurement]));
  return new Map(
    versions.flatMap((version) => {
      const measurement = byId.get(version.measurementId);
      return measurement ? [[version.id, measuredBy(measurement, version)] as const] : [];
    }),
  );
}

/** Settings that stand, by notebook's id. */
async function standingSettings(notebooks: readonly Notebook[]): Promise<Map<string, NotebookSettings>> {
  const revisions = await NotebookRevision.findAll({
    where: { [Op.or]: notebooks.map(({ id, revision }) => ({ notebookId: id, revision })) },
    attributes: ['notebookId', 'settings'],
  });
  return new Map(revisions.map(({ notebookId, settings }) => [notebookId, settings]));
}

/** The settings that stand in a notebook. */
export async function settingsOf(notebook: Notebook): Promise<NotebookSettings> {
  const settings = (await standingSettings([notebook])).get(notebook.id);
  if (!settings) throw notFound('notebook');
  return settings;
}

/** The last revision that changed what a fit freezes, by notebook's id: words and titles make no fit old. */
async function settledRevisions(notebooks: readonly Notebook[]): Promise<Map<string, number>> {
  const revisions = await NotebookRevision.findAll({
    where: { notebookId: notebooks.map(({ id }) => id) },
    attributes: ['notebookId', 'revision', 'sections'],
    order: [['revision', 'ASC']],
  });
  const settled = revisions.filter(({ sections }) =>
    settingSections.some((section) => sections.includes(section)),
  );
  return new Map(settled.map(({ notebookId, revision }) => [notebookId, revision]));
}

/**
 * The notebooks of a group, last changed first. For services that have authorised: it asks for nothing itself.
 */
export async function notebookSummaries(groupId: string): Promise<NotebookSummary[]> {
  const notebooks = await Notebook.findAll({ where: { groupId }, order: [['updatedAt', 'DESC']] });
  if (notebooks.length === 0) return [];
  const settings = await standingSettings(notebooks);
  const furtherIds = [...settings.values()].flatMap(({ also = [] }) => also.map(({ version }) => version));
  const [settled, measurements, fits] = await Promise.all([
    settledRevisions(notebooks),
    measuredByVersion([...notebooks.map(({ measurementVersionId }) => measurementVersionId), ...furtherIds]),
    Fit.findAll({
      where: { notebookId: notebooks.map(({ id }) => id) },
      attributes: [...fitLine],
      order: [['number', 'ASC']],
    }),
  ]);
  const lastFits = new Map(fits.map((fit) => [fit.notebookId, fit]));
  const finished = new Map(
    fits
      .filter(({ status }) => status === 'converged' || status === 'budget-spent')
      .map((fit) => [fit.notebookId, fit]),
  );
  const people = await emailsOf([
    ...notebooks.map(({ updatedBy }) => updatedBy),
    ...[...lastFits.values()].map(({ startedBy }) => startedBy),
  ]);
  return notebooks.flatMap((notebook) => {
    const standing = settings.get(notebook.id);
    const measurement = measurements.get(notebook.measurementVersionId);
    if (!standing || !measurement) return [];
    const lastFit = lastFits.get(notebook.id) ?? null;
    return [
      presentNotebookSummary(
        notebook,
        { settings: standing, settled: settled.get(notebook.id) ?? 1 },
        measurement,
        (standing.also ?? []).flatMap(({ version }) => measurements.get(version) ?? []),
        { lastFit, finishedFit: finished.get(notebook.id) ?? null },
        people,
      ),
    ];
  });
}
