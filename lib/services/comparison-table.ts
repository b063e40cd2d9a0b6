import { Fit, MeasurementVersion, Notebook, NotebookRevision, type NotebookSettings } from '@/models';
import { AppError, notFound } from '@/lib/errors';
import {
  blindComparison,
  presentComparison,
  questionOf,
  type CountedFit,
  type FrozenFit,
} from '@/lib/presenters/comparison';
import { likelihoodSchema, mostFields, snapshotSchema, type Comparison } from '@/lib/schemas';
import type { Access } from './access';
import { canonicalJson } from './canonical-json';
import { withFieldCount, withoutFamily } from './field-counts';
import { freeze } from './fits';
import { measuredTogether, type MeasuredTogether } from './measured-together';

/** What of a snapshot the notebook settles; two fits that share it differ in chance, budget or program alone. */
const settled = (
  versions: number[],
  {
    cuts,
    likelihood,
    template,
    priors,
    also = [],
    sharedMocks,
  }: Omit<NotebookSettings, 'also'> & { also?: { cuts: NotebookSettings['cuts'] }[] },
): string =>
  canonicalJson({
    versions,
    cuts: [cuts, ...also.map((part) => part.cuts)],
    likelihood,
    template,
    priors,
    sharedMocks: sharedMocks ?? false,
  });

/** The last fit of the standing settings with each number of fields; one that has ended before one that hasn't. */
function countedFits(
  fits: readonly FrozenFit[],
  measured: MeasuredTogether,
  settings: NotebookSettings,
): CountedFit[] {
  const bySettings = new Map<string, FrozenFit[]>();
  for (const each of fits) {
    const key = settled(
      [each.snapshot, ...(each.snapshot.also ?? [])].map(({ measurementVersion }) => measurementVersion),
      each.snapshot,
    );
    bySettings.set(key, [...(bySettings.get(key) ?? []), each]);
  }
  return Array.from({ length: mostFields + 1 }, (_, fields): CountedFit => {
    try {
      const changed = withFieldCount(measured.numbers, settings, fields, measured);
      const found =
        bySettings.get(
          settled(
            measured.parts.map(({ version }) => version.version),
            changed,
          ),
        ) ?? [];
      const done = found.findLast(({ fit }) => ['converged', 'budget-spent'].includes(fit.status));
      return { fields, fit: done ?? found.at(-1) ?? null, because: null };
    } catch (error) {
      if (!(error instanceof AppError) || error.blame === 'ours') throw error;
      return { fields, fit: null, because: error.message };
    }
  });
}

/** The fits of the notebook of `access` side by side. */
export async function readComparison(access: Access): Promise<Comparison> {
  access.require('notebook.read');
  access.require('fit.read');
  const notebook = await Notebook.findByPk(access.id);
  if (!notebook) throw notFound('notebook');
  const [standing, version, rows] = await Promise.all([
    NotebookRevision.findOne({ where: { notebookId: notebook.id, revision: notebook.revision } }),
    MeasurementVersion.findByPk(notebook.measurementVersionId),
    Fit.findAll({ where: { notebookId: notebook.id }, order: [['number', 'ASC']] }),
  ]);
  if (!standing || !version) throw notFound('notebook');
  const { settings } = standing;
  const noFamily = withoutFamily(settings);
  const measured = await measuredTogether(version, settings);
  if (measured.blind) return blindComparison(noFamily);
  const fits = rows.map((fit): FrozenFit => ({ fit, snapshot: snapshotSchema.parse(fit.snapshot) }));
  return presentComparison({
    fits,
    standing: questionOf({
      ...freeze(measured, settings, {}),
      likelihood: likelihoodSchema.parse(settings.likelihood),
    }),
    counts: noFamily === null ? countedFits(fits, measured, settings) : [],
    noFamily,
  });
}
