import { Group, Measurement, MeasurementVersion } from '@/models';
import { notFound } from '@/lib/errors';
import { actionsFor } from '@/lib/policies';
import {
  presentCorrelation,
  presentListed,
  presentMeasurement,
  presentSummary,
  presentVersion,
} from '@/lib/presenters/measurements';
import type {
  Correlation,
  Measurement as MeasurementAnswer,
  MeasurementListed,
  MeasurementSummary,
} from '@/lib/schemas';
import type { Access } from './access';
import { readPoints } from './inference-spec';
import { countFitsOn, countNotebooks, notebooksOn } from './measurement-rest';
import { emailsOf } from './people';

const heads = { exclude: ['points', 'covariance', 'theory'] };

const nameOf = (people: ReadonlyMap<string, string>, id: string): string =>
  people.get(id) ?? 'a former member';

/** The measurement of `access` in one version, the newest where none is named. */
async function findVersion(access: Access, version: number | undefined) {
  const measurement = await Measurement.findByPk(access.id);
  const found = await MeasurementVersion.findOne({
    where: { measurementId: access.id, ...(version === undefined ? {} : { version }) },
    order: [['version', 'DESC']],
  });
  if (!measurement) throw notFound('measurement');
  if (!found) throw notFound(version === undefined ? 'measurement' : `version ${version} of the measurement`);
  return { measurement, version: found };
}

/** The measurement of `access` with its points, in the version asked for or its newest. */
export async function readMeasurement(access: Access, wanted?: number): Promise<MeasurementAnswer> {
  access.require('measurement.read');
  const { measurement, version } = await findVersion(access, wanted);
  const lines = await MeasurementVersion.findAll({
    where: { measurementId: access.id },
    attributes: heads,
    order: [['version', 'DESC']],
  });
  const [people, resting, fits] = await Promise.all([
    emailsOf(lines.map(({ createdBy }) => createdBy)),
    notebooksOn(lines),
    countFitsOn(lines.map(({ id }) => id)),
  ]);
  return presentMeasurement(measurement, version, readPoints(version), {
    uploadedBy: nameOf(people, version.createdBy),
    versions: lines.map((line) =>
      presentVersion(line, nameOf(people, line.createdBy), fits.get(line.id) ?? 0),
    ),
    resting,
    may: [
      ...actionsFor(access.role, 'measurement'),
      ...actionsFor(access.role, 'notebook').filter((action) => action !== 'notebook.read'),
    ],
  });
}

/** The correlation of the bins of one version of the measurement of `access`. */
export async function readCorrelation(access: Access, wanted?: number): Promise<Correlation> {
  access.require('measurement.read');
  const { version } = await findVersion(access, wanted);
  return presentCorrelation(version, readPoints(version));
}

/** Measurements of a group, newest first, with the newest version of each that `attributes` says. */
async function newestOf(groupId: string, attributes?: typeof heads) {
  const measurements = await Measurement.findAll({ where: { groupId }, order: [['createdAt', 'DESC']] });
  const lines = await MeasurementVersion.findAll({
    where: { measurementId: measurements.map(({ id }) => id) },
    attributes: ['id', 'measurementId', 'version'],
    order: [['version', 'ASC']],
  });
  const newest = new Map(lines.map((line) => [line.measurementId, line.id]));
  const versions = await MeasurementVersion.findAll({ where: { id: [...newest.values()] }, attributes });
  const [people, notebooks] = await Promise.all([
    emailsOf(versions.map(({ createdBy }) => createdBy)),
    countNotebooks(lines),
  ]);
  const byMeasurement = new Map(versions.map((version) => [version.measurementId, version]));
  return measurements.flatMap((measurement) => {
    const version = byMeasurement.get(measurement.id);
    if (!version) return [];
    return [
      {
        measurement,
        version,
        uploadedBy: nameOf(people, version.createdBy),
        notebooks: notebooks.get(measurement.id) ?? 0,
      },
    ];
  });
}

/**
 * The measurements of a group, newest first, each in its newest version. For services that have authorised: it asks
 * for nothing itself.
 */
export async function measurementSummaries(groupId: string): Promise<MeasurementSummary[]> {
  const found = await newestOf(groupId, heads);
  return found.map(({ measurement, version, uploadedBy, notebooks }) =>
    presentSummary(measurement, version, uploadedBy, notebooks),
  );
}

/** The measurements of the group of `access` with their points, newest first. */
export async function listMeasurements(access: Access): Promise<MeasurementListed[]> {
  access.require('measurement.read');
  if (!(await Group.findByPk(access.groupId, { attributes: ['id'] }))) throw notFound('group');
  const found = await newestOf(access.groupId);
  return found.map(({ measurement, version, uploadedBy, notebooks }) =>
    presentListed(measurement, version, readPoints(version), { uploadedBy, notebooks }),
  );
}
