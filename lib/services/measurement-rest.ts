import { Op, fn, col, type Transaction } from 'sequelize';
import { Fit, FitPart, Notebook, NotebookPart, type MeasurementVersion } from '@/models';
import type { RestingNotebook } from '@/lib/schemas';
import { isBlindVersion } from './version-lines';

type VersionLine = Pick<MeasurementVersion, 'id' | 'measurementId' | 'version'>;

/** Notebooks that rest on one of these versions, by number. */
export async function notebooksOn(
  versions: readonly VersionLine[],
  transaction?: Transaction,
): Promise<RestingNotebook[]> {
  const numbers = new Map(versions.map(({ id, version }) => [id, version]));
  const parts = await NotebookPart.findAll({
    where: { measurementVersionId: [...numbers.keys()] },
    transaction,
  });
  const byNotebook = new Map(parts.map((part) => [part.notebookId, part.measurementVersionId]));
  const notebooks = await Notebook.findAll({
    where: { [Op.or]: [{ measurementVersionId: [...numbers.keys()] }, { id: [...byNotebook.keys()] }] },
    attributes: ['id', 'number', 'title', 'measurementVersionId'],
    order: [['number', 'ASC']],
    transaction,
  });
  return notebooks.flatMap(({ id, number, title, measurementVersionId }) => {
    const version = numbers.get(measurementVersionId) ?? numbers.get(byNotebook.get(id) ?? '');
    return version === undefined ? [] : [{ id, number, title, version }];
  });
}

/** Rows of `model` by the version that they name. */
async function countBy(
  model: typeof Fit | typeof FitPart | typeof Notebook | typeof NotebookPart,
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
  countBoth(Fit, FitPart, versionIds);

/** Rows that have it as their first measurement, and those that have it as a further one. */
async function countBoth(
  first: typeof Fit | typeof Notebook,
  further: typeof FitPart | typeof NotebookPart,
  versionIds: readonly string[],
): Promise<Map<string, number>> {
  const [own, parts] = await Promise.all([countBy(first, versionIds), countBy(further, versionIds)]);
  return new Map(versionIds.map((id) => [id, (own.get(id) ?? 0) + (parts.get(id) ?? 0)]));
}

/** How many notebooks rest on each measurement, in any of these versions, by the measurement's id. */
export async function countNotebooks(versions: readonly VersionLine[]): Promise<Map<string, number>> {
  const byVersion = await countBoth(
    Notebook,
    NotebookPart,
    versions.map(({ id }) => id),
  );
  const totals = new Map<string, number>();
  for (const { id, measurementId } of versions) {
    totals.set(measurementId, (totals.get(measurementId) ?? 0) + (byVersion.get(id) ?? 0));
  }
  return totals;
}

/** Whether one of the measurements that a notebook rests on is blind; a notebook that isn't there counts as blind. */
export async function isBlindNotebook(notebookId: string): Promise<boolean> {
  const notebook = await Notebook.findByPk(notebookId, { attributes: ['measurementVersionId'] });
  if (!notebook) return true;
  const parts = await NotebookPart.findAll({ where: { notebookId }, attributes: ['measurementVersionId'] });
  const ids = [notebook, ...parts].map(({ measurementVersionId }) => measurementVersionId);
  const blind = await Promise.all(ids.map(isBlindVersion));
  return blind.some(Boolean);
}
