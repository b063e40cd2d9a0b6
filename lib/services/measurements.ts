import { Measurement, MeasurementVersion } from '@/models';
import { notFound } from '@/lib/errors';
import { actionsFor, may } from '@/lib/policies';
import { presentMeasurement, presentSummary } from '@/lib/presenters/measurements';
import type { Measurement as MeasurementAnswer, MeasurementSummary } from '@/lib/schemas';
import type { Access } from './access';
import { readPoints } from './inference-spec';
import { emailsOf } from './people';

/** The measurement of `access` in its newest version, with its points. */
export async function readMeasurement(access: Access): Promise<MeasurementAnswer> {
  access.require('measurement.read');
  const measurement = await Measurement.findByPk(access.id);
  const version = await MeasurementVersion.findOne({
    where: { measurementId: access.id },
    order: [['version', 'DESC']],
  });
  if (!measurement || !version) throw notFound('measurement');
  const people = await emailsOf([version.createdBy]);
  return presentMeasurement(measurement, version, readPoints(version), {
    uploadedBy: people.get(version.createdBy) ?? 'a former member',
    may: [
      ...actionsFor(access.role, 'measurement'),
      ...(may(access.role, 'notebook.create') ? ['notebook.create'] : []),
    ],
  });
}

/**
 * The measurements of a group, newest first, each in its newest version. For services that have authorised: it asks
 * for nothing itself.
 */
export async function measurementSummaries(groupId: string): Promise<MeasurementSummary[]> {
  const measurements = await Measurement.findAll({ where: { groupId }, order: [['createdAt', 'DESC']] });
  const versions = await MeasurementVersion.findAll({
    where: { measurementId: measurements.map(({ id }) => id) },
    attributes: { exclude: ['points', 'covariance'] },
    order: [['version', 'ASC']],
  });
  const newest = new Map(versions.map((version) => [version.measurementId, version]));
  const people = await emailsOf([...newest.values()].map(({ createdBy }) => createdBy));
  return measurements.flatMap((measurement) => {
    const version = newest.get(measurement.id);
    if (!version) return [];
    return [presentSummary(measurement, version, people.get(version.createdBy) ?? 'a former member')];
  });
}
