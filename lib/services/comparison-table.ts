import {
  Fit,
  Measurement,
  MeasurementVersion,
  Notebook,
  NotebookRevision,
  type NotebookSettings,
} from '@/models';
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

/** What of a snapshot the notebook settles; two fits that share it differ in chance, budget or program alone. */
const settled = (version: number, { cuts, likelihood, template, priors }: NotebookSettings): string =>
  canonicalJson({ version, cuts, likelihood, template, priors });

/** The last fit of the standing settings with each number of fields; one that has ended before one that hasn't. */
function countedFits(
  fits: readonly FrozenFit[],
  version: MeasurementVersion,
  settings: NotebookSettings,
  measurement: Measurement,
): CountedFit[] {
  const bySettings = new Map<string, FrozenFit[]>();
  for (const each of fits) {
    const key = settled(each.snapshot.measurementVersion, each.snapshot);
    bySettings.set(key, [...(bySettings.get(key) ?? []), each]);
  }
  return Array.from({ length: mostFields + 1 }, (_, fields): CountedFit => {
    try {
      const changed = withFieldCount(version, settings, fields, measurement);
      const found = bySettings.get(settled(version.version, changed)) ?? [];
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
  const measurement = version && (await Measurement.findByPk(version.measurementId));
  if (!standing || !version || !measurement) throw notFound('notebook');
  const { settings } = standing;
  const noFamily = withoutFamily(settings);
  if (measurement.blind) return blindComparison(noFamily);
  const fits = rows.map((fit): FrozenFit => ({ fit, snapshot: snapshotSchema.parse(fit.snapshot) }));
  return presentComparison({
    fits,
    standing: questionOf({
      inputs: version.files.map(({ part, sha256 }) => ({ part, sha256 })),
      measurementVersion: version.version,
      cuts: settings.cuts,
      spectrum: version.spectrum ?? undefined,
      mockCount: version.mockCount,
      likelihood: likelihoodSchema.parse(settings.likelihood),
    }),
    counts: noFamily === null ? countedFits(fits, version, settings, measurement) : [],
    noFamily,
  });
}
