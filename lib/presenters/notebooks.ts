import type { Fit, Notebook as NotebookRow, NotebookRevision, NotebookSettings } from '@/models';
import {
  fitStatusSchema,
  likelihoodSchema,
  notebookSections,
  priorsSchema,
  type FitSummary,
  type Notebook,
  type NotebookCreated,
  type NotebookSummary,
  type Revision,
} from '@/lib/schemas';
import { fieldCount } from '@/lib/templates';

/** E-mail addresses by user's id. */
export type People = ReadonlyMap<string, string>;

/** What the presenters need of a measurement. */
export interface MeasuredBy {
  id: string;
  name: string;
  version: number;
  blind: boolean;
  simulated: boolean;
}

export type FitLine = Pick<
  Fit,
  'id' | 'number' | 'status' | 'revision' | 'startedBy' | 'createdAt' | 'endedAt'
>;

const nameOf = (people: People, id: string): string => people.get(id) ?? 'a former member';

export function presentFitSummary(fit: FitLine, people: People): FitSummary {
  return {
    id: fit.id,
    number: fit.number,
    status: fitStatusSchema.parse(fit.status),
    revision: fit.revision,
    startedBy: nameOf(people, fit.startedBy),
    createdAt: fit.createdAt.toISOString(),
    endedAt: fit.endedAt?.toISOString() ?? null,
  };
}

export function presentNotebookCreated(
  notebook: Pick<NotebookRow, 'id' | 'revision'>,
  { blind }: { blind: boolean },
): NotebookCreated {
  return { id: notebook.id, revision: notebook.revision, blind };
}

/** Fields of the template as its options say; a template without the option has none. */
const fieldsOf = ({ template }: NotebookSettings): number => fieldCount(template.options.fields);

export function presentNotebookSummary(
  notebook: NotebookRow,
  { settings, settled }: { settings: NotebookSettings; settled: number },
  measurement: MeasuredBy,
  further: readonly MeasuredBy[],
  { lastFit, finishedFit }: { lastFit: FitLine | null; finishedFit: FitLine | null },
  people: People,
): NotebookSummary {
  return {
    id: notebook.id,
    number: notebook.number,
    title: notebook.title,
    revision: notebook.revision,
    settledRevision: settled,
    measurementId: measurement.id,
    measurementName: measurement.name,
    measurementVersion: measurement.version,
    also: further.map(({ id, name, version }) => ({ id, name, version })),
    templateId: settings.template.id,
    fields: fieldsOf(settings),
    blind: [measurement, ...further].some((each) => each.blind),
    simulated: [measurement, ...further].some((each) => each.simulated),
    lastFit: lastFit && presentFitSummary(lastFit, people),
    finishedFit: finishedFit && finishedFit.id,
    updatedBy: nameOf(people, notebook.updatedBy),
    updatedAt: notebook.updatedAt.toISOString(),
    archivedAt: notebook.archivedAt?.toISOString() ?? null,
  };
}

export interface NotebookParts {
  notebook: NotebookRow;
  groupName: string;
  measurement: MeasuredBy;
  /** The newest version of the measurement that there is. */
  newestVersion: number;
  settings: NotebookSettings;
  statement: string;
  bins: { kept: number; all: number };
  /** Further measurements. */
  also: Notebook['also'];
  /** Whether one of all is blind, or simulated. */
  blind: boolean;
  simulated: boolean;
  /** In ascending order of revision. */
  revisions: readonly Pick<
    NotebookRevision,
    'revision' | 'sections' | 'restoredFrom' | 'createdBy' | 'createdAt'
  >[];
  /** Newest first. */
  fits: readonly FitLine[];
  people: People;
  may: readonly string[];
}

export function presentNotebook(parts: NotebookParts): Notebook {
  const { notebook, measurement, settings, people } = parts;
  return {
    id: notebook.id,
    number: notebook.number,
    groupId: notebook.groupId,
    groupName: parts.groupName,
    title: notebook.title,
    revision: notebook.revision,
    blind: parts.blind,
    simulated: parts.simulated,
    measurement: {
      id: measurement.id,
      name: measurement.name,
      version: measurement.version,
      newest: parts.newestVersion,
    },
    cuts: settings.cuts,
    bins: parts.bins,
    also: parts.also,
    sharedMocks: settings.sharedMocks ?? false,
    likelihood: likelihoodSchema.parse(settings.likelihood),
    template: {
      id: settings.template.id,
      version: settings.template.version,
      options: settings.template.options,
    },
    priors: priorsSchema.parse(settings.priors),
    statement: parts.statement,
    record: parts.revisions.map((revision) => ({
      revision: revision.revision,
      by: nameOf(people, revision.createdBy),
      at: revision.createdAt.toISOString(),
      sections: notebookSections.filter((section) => revision.sections.includes(section)),
      restoredFrom: revision.restoredFrom,
    })),
    fits: parts.fits.map((fit) => presentFitSummary(fit, people)),
    createdBy: nameOf(people, notebook.createdBy),
    createdAt: notebook.createdAt.toISOString(),
    origin: notebook.origin,
    archived: notebook.archivedAt && {
      by: nameOf(people, notebook.archivedBy ?? ''),
      at: notebook.archivedAt.toISOString(),
    },
    may: [...parts.may],
  };
}

export function presentRevision(
  revision: NotebookRevision,
  statement: string,
  people: People,
  versions: ReadonlyMap<string, { name: string; version: number }>,
): Revision {
  const { settings } = revision;
  return {
    revision: revision.revision,
    title: revision.title,
    by: nameOf(people, revision.createdBy),
    at: revision.createdAt.toISOString(),
    sections: notebookSections.filter((section) => revision.sections.includes(section)),
    restoredFrom: revision.restoredFrom,
    cuts: settings.cuts,
    likelihood: likelihoodSchema.parse(settings.likelihood),
    template: settings.template,
    priors: priorsSchema.parse(settings.priors),
    also: (settings.also ?? []).map(({ version, cuts }) => {
      const measured = versions.get(version);
      return { name: measured?.name ?? null, version: measured?.version ?? null, cuts };
    }),
    sharedMocks: settings.sharedMocks ?? false,
    statement,
  };
}
