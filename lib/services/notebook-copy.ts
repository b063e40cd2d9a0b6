import {
  Fit,
  Measurement,
  MeasurementVersion,
  Notebook,
  NotebookRevision,
  type NotebookSettings,
} from '@/models';
import { AppError, notFound } from '@/lib/errors';
import { presentNotebookCreated } from '@/lib/presenters/notebooks';
import { snapshotSchema, type CopyNotebook, type NotebookCreated } from '@/lib/schemas';
import type { Access } from './access';
import { carryCuts, carryPriors, settleSettings } from './notebook-settings';
import { alsoOfFit, measuredTogether, measurementsOf } from './measured-together';
import { findMeasured, insertNotebook } from './notebooks';

/** Longest title of a notebook. */
const longest = 160;

/** "Two fields (copy)"; a title that would grow too long is cut before the word. */
export function copyTitle(title: string): string {
  const word = ' (copy)';
  return `${title.slice(0, longest - word.length).trimEnd()}${word}`;
}

interface Original {
  settings: NotebookSettings;
  revision: number;
  fit: number | null;
  versionId: string;
}

async function originalOf(notebook: Notebook, fitId: string | undefined): Promise<Original> {
  if (fitId === undefined) {
    const { settings, revision } = await NotebookRevision.findOne({
      where: { notebookId: notebook.id, revision: notebook.revision },
      rejectOnEmpty: true,
    });
    return { settings, revision, fit: null, versionId: notebook.measurementVersionId };
  }
  const fit = await Fit.findOne({ where: { id: fitId, notebookId: notebook.id } });
  if (!fit) {
    const { code, message } = notFound('fit');
    throw new AppError(code, message, [{ path: 'fit', message }]);
  }
  const snapshot = snapshotSchema.parse(fit.snapshot);
  const { cuts, likelihood, template, priors } = snapshot;
  return {
    settings: { cuts, likelihood, template, priors, ...(await alsoOfFit(fit.id, snapshot)) },
    revision: fit.revision,
    fit: fit.number,
    versionId: fit.measurementVersionId,
  };
}

async function versionOf(id: string) {
  const version = await MeasurementVersion.findByPk(id, { rejectOnEmpty: true });
  return {
    version,
    measurement: await Measurement.findByPk(version.measurementId, { rejectOnEmpty: true }),
  };
}

/**
 * The further measurements of a copy: those of the original, but for the one that the copy itself is on. The priors of the original's
 * first measurement go to the copy's.
 */
async function furtherOf(settings: NotebookSettings, own: Measurement, target: Measurement) {
  const before = await measurementsOf(own, settings.also);
  const also = (settings.also ?? []).filter((_, k) => before[k + 1] !== target.id);
  const after = [own.id, ...before.slice(1).filter((id) => id !== target.id)];
  return {
    chosen: also.length > 0 ? { also, ...(settings.sharedMocks ? { sharedMocks: true as const } : {}) } : {},
    changed: also.length !== (settings.also ?? []).length,
    kept: (priors: NotebookSettings['priors']) => carryPriors(priors, before, after),
  };
}

/**
 * Opens a notebook with the settings of the one of `access`: those that stand, or those that a fit froze. On the same version
 * of the measurement, or on the newest of another one of the group, where a likelihood that asks for a known number of mocks
 * gives way to that measurement's own default if it has none (or the other way round), and so does bin averaging where only one has edges. Settings that can't be fitted there are refused.
 */
export async function copyNotebook(access: Access, body: CopyNotebook): Promise<NotebookCreated> {
  access.require('notebook.create');
  const notebook = await Notebook.findByPk(access.id);
  if (!notebook) throw notFound('notebook');
  const original = await originalOf(notebook, body.fit);
  const own = await versionOf(original.versionId);
  const target = body.measurement === undefined ? own : await findMeasured(access.groupId, body.measurement);
  const { likelihood, template, priors } = original.settings;
  const { cuts, dropped } = carryCuts(target.version, original.settings.cuts);
  const alike = (own.version.mockCount === null) === (target.version.mockCount === null);
  const { binAverage, ...others } = template.options;
  const edges = own.version.hasBinEdges === target.version.hasBinEdges;
  const further = await furtherOf(original.settings, own.measurement, target.measurement);
  const measured = await measuredTogether(target.version, further.chosen);
  const settings = settleSettings(
    measured.numbers,
    {
      cuts,
      likelihood: alike && !further.changed ? likelihood : undefined,
      template: { id: template.id, options: edges ? { ...others, binAverage } : others },
      given: {},
      kept: further.kept(priors),
      ...further.chosen,
    },
    measured,
  );
  const made = await insertNotebook(access, {
    title: body.title ?? copyTitle(notebook.title),
    settings,
    ...target,
    origin: {
      number: notebook.number,
      title: notebook.title,
      revision: original.revision,
      fit: original.fit,
      ...(dropped.length ? { droppedBins: dropped.length } : {}),
    },
  });
  return presentNotebookCreated(made, measured);
}
