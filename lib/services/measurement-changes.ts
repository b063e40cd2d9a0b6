import type { Transaction } from 'sequelize';
import { Fit, FitPart, Group, Measurement, MeasurementVersion } from '@/models';
import { database } from '@/lib/db';
import { AppError, notFound } from '@/lib/errors';
import type {
  ErrorDetail,
  Measurement as MeasurementAnswer,
  MeasurementDeleted,
  PatchMeasurement,
  RestingNotebook,
} from '@/lib/schemas';
import type { Access } from './access';
import { recordEvent } from './audit';
import { discardFiles } from './measurement-files';
import { notebooksOn } from './measurement-rest';
import { readMeasurement } from './measurements';

/** Renames or describes the measurement of `access`; all its versions go by the one name. */
export async function patchMeasurement(access: Access, body: PatchMeasurement): Promise<MeasurementAnswer> {
  access.require('measurement.edit');
  await database().transaction(async (transaction) => {
    const measurement = await Measurement.findByPk(access.id, { lock: true, transaction });
    if (!measurement) throw notFound('measurement');
    const { name, description } = { ...measurement.get(), ...body };
    const changed = (['name', 'description'] as const).filter(
      (key) => body[key] !== undefined && body[key] !== measurement[key],
    );
    if (changed.length === 0) return;
    await measurement.update({ name, description }, { transaction });
    await record(access, 'measurement.edit', { changed, name }, transaction);
  });
  return readMeasurement(access);
}

const record = (
  { actor, groupId, id }: Access,
  action: string,
  details: Record<string, unknown>,
  transaction: Transaction,
): Promise<void> =>
  recordEvent(
    { groupId, actorId: actor.userId, action, subjectType: 'measurement', subjectId: id, details },
    transaction,
  );

const heads = ['id', 'measurementId', 'version', 'files'];

/**
 * The measurement of `access` and its versions, newest first. The group's row is locked, as uploads and new notebooks
 * lock it, so that nothing can come to rest on what is being deleted.
 */
async function lockVersions(access: Access, transaction: Transaction) {
  await Group.findByPk(access.groupId, { attributes: ['id'], lock: true, transaction });
  const measurement = await Measurement.findByPk(access.id, { lock: true, transaction });
  if (!measurement) throw notFound('measurement');
  const versions = await MeasurementVersion.findAll({
    where: { measurementId: access.id },
    attributes: heads,
    order: [['version', 'DESC']],
    transaction,
  });
  return { measurement, versions };
}

function refuseResting(what: string, notebooks: readonly RestingNotebook[], fits: number): never {
  const details: ErrorDetail[] = notebooks.map(({ number, title, version }) => ({
    path: `notebooks.${number}`,
    message: `Notebook ${number}, ${title}, rests on version ${version}.`,
  }));
  if (fits > 0) {
    const were = fits === 1 ? '1 fit was' : `${fits} fits were`;
    details.push({ path: 'fits', message: `${were} made on it and would lose what they were made from.` });
  }
  throw new AppError(
    'conflict',
    `${what} can’t be deleted: something rests on it. Nothing was changed.`,
    details,
  );
}

/** Throws `conflict` with the list of what rests on these versions, where something does. */
async function refuseIfResting(
  what: string,
  versions: readonly MeasurementVersion[],
  transaction: Transaction,
): Promise<void> {
  const [notebooks, own, further] = await Promise.all([
    notebooksOn(versions, transaction),
    Fit.count({ where: { measurementVersionId: versions.map(({ id }) => id) }, transaction }),
    FitPart.count({ where: { measurementVersionId: versions.map(({ id }) => id) }, transaction }),
  ]);
  const fits = own + further;
  if (notebooks.length > 0 || fits > 0) refuseResting(what, notebooks, fits);
}

/**
 * Deletes the measurement of `access` with all versions, unless a notebook or fit rests on one. Rows go first, in one
 * transaction, then the stored files: where the process dies between the two, the sweep of stray files takes them.
 */
export async function deleteMeasurement(access: Access): Promise<MeasurementDeleted> {
  access.require('measurement.delete');
  const files = await database().transaction(async (transaction) => {
    const { measurement, versions } = await lockVersions(access, transaction);
    await refuseIfResting(measurement.name, versions, transaction);
    await record(
      access,
      'measurement.delete',
      { name: measurement.name, versions: versions.length },
      transaction,
    );
    await measurement.destroy({ transaction });
    return versions.flatMap((version) => version.files);
  });
  await discardFiles(files);
  return { id: access.id, version: null };
}

/** Deletes the newest version of the measurement of `access`, unless something rests on it or it is the only one. */
export async function deleteVersion(access: Access, number: number): Promise<MeasurementDeleted> {
  access.require('measurement.delete');
  const files = await database().transaction(async (transaction) => {
    const { measurement, versions } = await lockVersions(access, transaction);
    const version = versions.find((each) => each.version === number);
    if (!version) throw notFound('version of the measurement');
    const what = `Version ${number} of ${measurement.name}`;
    await refuseIfResting(what, [version], transaction);
    if (version !== versions[0]) {
      throw new AppError(
        'conflict',
        `${what} can’t be deleted: only the newest version can, which is ${versions[0].version}.`,
      );
    }
    if (versions.length === 1) {
      throw new AppError('conflict', `${what} is the only one. Delete the measurement as a whole.`);
    }
    await record(
      access,
      'measurement.delete-version',
      { name: measurement.name, version: number },
      transaction,
    );
    await version.destroy({ transaction });
    return version.files;
  });
  await discardFiles(files);
  return { id: access.id, version: number };
}
