import { fn, col, type Transaction } from 'sequelize';
import { Fit, Measurement, MeasurementVersion, Notebook } from '@/models';
import type { RestingNotebook } from '@/lib/schemas';

type VersionLine = Pick<MeasurementVersion, 'id' | 'measurementId' | 'version'>;

/** Notebooks that rest on one of these versions, by number. */
export async function notebooksOn(
  versions: readonly VersionLine[],
  transaction?: Transaction,
): Promise<RestingNotebook[]> {
  const numbers = new Map(versions.map(({ id, version }) => [id, version]));
  const notebooks = await Notebook.findAll({
    where: { measurementVersionId: [...numbers.keys()] },
    attributes: ['id', 'number', 'title', 'measurementVersionId'],
    order: [['number', 'ASC']],
    transaction,
  });
  return notebooks.flatMap(({ id, number, title, measurementVersionId }) => {
    const version = numbers.get(measurementVersionId);
    return version === undefined ? [] : [{ id, number, title, version }];
  });
}

/** Rows of `model` by the version that they name. */
async function countBy(
  model: typeof Fit | typeof Notebook,
  versionIds: readonly string[],
): Promise<Map<string, number>> {
  const rows = (await (model as typeof Fit).findAll({
    where: { measurementVersionId: [...versionIds] },
    attributes: ['measurementVersionId', [fn('COUNT', col('id')), 'total']],
    group: ['measurement_version_id'],
    raw: true,
  })) as unknown as { measurementVersionId: string; total: number | bigint }[];
  return new Map(rows.map(({ measurementVersionId, total }) => [measurementVersionId, Number(total)]));
}

/** How many fits were made on each version, by the version's id. */
export const countFitsOn = (versionIds: readonly string[]): Promise<Map<string, number>> =>
  countBy(Fit, versionIds);

/** How many notebooks rest on each measurement, in any of these versions, by the measurement's id. */
export async function countNotebooks(versions: readonly VersionLine[]): Promise<Map<string, number>> {
  const byVersion = await countBy(
    Notebook,
    versions.map(({ id }) => id),
  );
  const totals = new Map<string, number>();
  for (const { id, measurementId } of versions) {
    totals.set(measurementId, (totals.get(measurementId) ?? 0) + (byVersion.get(id) ?? 0));
  }
  return totals;
}

/** Whether the measurement that a notebook rests on is blind; a notebook that isn't there counts as blind. */
export async function isBlindNotebook(notebookId: string): Promise<boolean> {
  const notebook = await Notebook.findByPk(notebookId, { attributes: ['measurementVersionId'] });
  const version =
    notebook &&
    (await MeasurementVersion.findByPk(notebook.measurementVersionId, { attributes: ['measurementId'] }));
  const measurement =
    version && (await Measurement.findByPk(version.measurementId, { attributes: ['blind'] }));
  return measurement?.blind ?? true;
}
