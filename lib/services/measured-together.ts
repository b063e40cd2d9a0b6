import type { Transaction } from 'sequelize';
import { FitPart, Measurement, MeasurementVersion, NotebookPart, type NotebookSettings } from '@/models';
import { AppError, notFound } from '@/lib/errors';
import type { AlsoMeasurement, Snapshot } from '@/lib/schemas';
import { storedNumbers, type StoredNumbers } from './fit-model';
import { hasMocks, readMocks } from './joint-mocks';

export interface Measured {
  version: MeasurementVersion;
  measurement: Measurement;
}

/** Everything that a notebook's settings are fitted to. */
export interface MeasuredTogether {
  /** The notebook's own measurement first. */
  parts: Measured[];
  numbers: StoredNumbers;
  /** Whether one of them is blind: then all is. */
  blind: boolean;
}

type Chosen = Pick<NotebookSettings, 'also' | 'sharedMocks'>;

const refuse = (path: string, message: string): never => {
  throw new AppError('invalid', message, [{ path, message }]);
};

/** Versions by their ids in that order, each with its measurement. `invalid` where one has been deleted since it was chosen. */
async function measuredBy(ids: readonly string[], transaction?: Transaction): Promise<Measured[]> {
  const versions = await MeasurementVersion.findAll({ where: { id: [...ids] }, transaction });
  const measurements = await Measurement.findAll({
    where: { id: versions.map(({ measurementId }) => measurementId) },
    transaction,
  });
  return ids.map((id, k) => {
    const version = versions.find((each) => each.id === id);
    const measurement = measurements.find((each) => each.id === version?.measurementId);
    if (version && measurement) return { version, measurement };
    return refuse(
      `alsoMeasurements.${k}`,
      `Further measurement ${k + 1} of these settings has been deleted since. Choose the measurements anew.`,
    );
  });
}

/** Why measurements can't be taken as having their mocks in common, in words; null where they can. */
export function sharedMocksFault(parts: readonly Measured[]): string | null {
  if (parts.length < 2) return 'Mocks are shared between measurements, and the notebook has a single one.';
  const without = parts.find(({ version }) => !hasMocks(version));
  if (without) {
    return `${without.measurement.name} came without its mocks, so what it has in common with the others can’t be known. Upload it with its mocks, or take the measurements as independent.`;
  }
  const counts = parts.map(({ version }) => version.mockCount);
  if (counts.some((count) => count !== counts[0])) {
    const listed = parts
      .map(({ measurement, version }) => `${measurement.name} ${version.mockCount}`)
      .join(', ');
    return `The measurements don’t have the same number of mocks (${listed}), so row i of each can’t be of one simulated sky. Take them as independent, or upload the mocks of the same skies.`;
  }
  return null;
}

/**
 * The measurements of a notebook's settings with their numbers, `first` being that of the notebook itself. Shared mocks are read from the
 * object store, unless the numbers are for `parameters` alone.
 */
export async function measuredTogether(
  first: MeasurementVersion,
  { also = [], sharedMocks }: Chosen,
  transaction?: Transaction,
  wanted: 'data' | 'parameters' = 'data',
): Promise<MeasuredTogether> {
  const measurement = await Measurement.findByPk(first.measurementId, { transaction });
  if (!measurement) throw notFound('measurement');
  const further =
    also.length === 0
      ? []
      : await measuredBy(
          also.map(({ version }) => version),
          transaction,
        );
  const parts = [{ version: first, measurement }, ...further];
  if (sharedMocks) {
    const fault = sharedMocksFault(parts);
    if (fault !== null) refuse('sharedMocks', fault);
  }
  const all: StoredNumbers[] = [];
  for (const { version } of parts) {
    const mocks = wanted === 'data' ? sharedMocks && (await readMocks(version)) : 'unread';
    all.push({ ...storedNumbers(version), ...(sharedMocks && mocks ? { mocks } : {}) });
  }
  const [own, ...others] = all;
  return {
    parts,
    numbers: others.length > 0 ? { ...own, also: others } : own,
    blind: parts.some(({ measurement: each }) => each.blind),
  };
}

/**
 * What a person chose as further measurements of a notebook on `own`, as settings have it. A measurement that stands among them already
 * stays in its version and with its cuts unless others are given; a new one is taken in its newest version.
 */
export async function chooseAlso(
  groupId: string,
  own: Pick<Measurement, 'id' | 'name'>,
  chosen: readonly AlsoMeasurement[],
  standing: NonNullable<NotebookSettings['also']>,
  transaction?: Transaction,
): Promise<NonNullable<NotebookSettings['also']>> {
  const before = await measuredBy(
    standing.map(({ version }) => version),
    transaction,
  );
  const taken = new Set([own.id]);
  const also: NonNullable<NotebookSettings['also']> = [];
  for (const [k, { measurement: id, version: number, cuts }] of chosen.entries()) {
    const path = `alsoMeasurements.${k}.measurement`;
    const measurement = await Measurement.findOne({ where: { id, groupId }, transaction });
    if (!measurement) {
      const { code, message } = notFound('measurement');
      throw new AppError(code, message, [{ path, message }]);
    }
    if (taken.has(id)) {
      refuse(
        path,
        `${measurement.name} would be in the fit twice, and its data would count twice. Name each measurement once.`,
      );
    }
    taken.add(id);
    const at = before.findIndex((each) => each.measurement.id === id);
    const kept = at < 0 ? null : { ...standing[at], number: before[at].version.version };
    if (kept && (number === undefined || number === kept.number)) {
      also.push({ version: kept.version, cuts: cuts ?? kept.cuts });
      continue;
    }
    const version = await MeasurementVersion.findOne({
      where: { measurementId: id, ...(number === undefined ? {} : { version: number }) },
      attributes: ['id'],
      order: [['version', 'DESC']],
      transaction,
    });
    if (!version) {
      const message = `${measurement.name} has no version ${number}.`;
      throw new AppError('invalid', message, [{ path: `alsoMeasurements.${k}.version`, message }]);
    }
    also.push({ version: version.id, cuts: cuts ?? kept?.cuts ?? {} });
  }
  return also;
}

/** Ids of the measurements of settings in their order. */
export async function measurementsOf(
  own: Pick<Measurement, 'id'>,
  also: NotebookSettings['also'],
  transaction?: Transaction,
): Promise<string[]> {
  if (!also?.length) return [own.id];
  const further = await measuredBy(
    also.map(({ version }) => version),
    transaction,
  );
  return [own.id, ...further.map(({ measurement }) => measurement.id)];
}

/** Ids of the further versions of a fit, in their order. */
export async function partsOfFit(fitId: string, transaction?: Transaction): Promise<string[]> {
  const rows = await FitPart.findAll({ where: { fitId }, order: [['place', 'ASC']], transaction });
  return rows.map(({ measurementVersionId }) => measurementVersionId);
}

/** What a snapshot says of further measurements, as settings have it. */
export async function alsoOfFit(
  fitId: string,
  { also, sharedMocks }: Pick<Snapshot, 'also' | 'sharedMocks'>,
  transaction?: Transaction,
): Promise<Chosen> {
  if (!also) return {};
  const versions = await partsOfFit(fitId, transaction);
  return {
    also: also.map(({ cuts }, k) => ({ version: versions[k], cuts })),
    ...(sharedMocks ? { sharedMocks } : {}),
  };
}

/** Writes which further versions a notebook rests on, in place of what was written before. */
export async function restOn(
  notebookId: string,
  also: NotebookSettings['also'],
  transaction: Transaction,
): Promise<void> {
  await NotebookPart.destroy({ where: { notebookId }, transaction });
  for (const [k, { version }] of (also ?? []).entries()) {
    await NotebookPart.create({ notebookId, place: k + 1, measurementVersionId: version }, { transaction });
  }
}
