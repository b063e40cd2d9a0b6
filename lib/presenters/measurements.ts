import type { Measurement as MeasurementRow, MeasurementVersion } from '@/models';
import {
  checkSchema,
  covarianceSources,
  type Check,
  type Measurement,
  type MeasurementCreated,
  type MeasurementSummary,
} from '@/lib/schemas';

/** A version without its numbers, which lists and answers to uploads don't need. */
export type VersionHead = Pick<
  MeasurementVersion,
  | 'version'
  | 'rows'
  | 'kappaMin'
  | 'kappaMax'
  | 'hasBinEdges'
  | 'sha256'
  | 'checks'
  | 'covarianceSource'
  | 'mockCount'
  | 'files'
  | 'createdAt'
>;

export type MeasurementHead = Pick<
  MeasurementRow,
  'id' | 'groupId' | 'name' | 'description' | 'blind' | 'simulated'
>;

/** The numbers of a version, as arrays. */
export interface VersionNumbers {
  kappa: Float64Array;
  kappaLo: Float64Array | null;
  kappaHi: Float64Array | null;
  S: Float64Array;
  covariance: Float64Array;
}

/** Above this many bins the answer would be larger than a page can use. */
const covarianceShownTo = 200;

const presentChecks = (version: VersionHead): Check[] =>
  version.checks.map((check) => checkSchema.parse(check));

export function presentCreated(measurement: MeasurementHead, version: VersionHead): MeasurementCreated {
  return {
    id: measurement.id,
    version: version.version,
    blind: measurement.blind,
    rows: version.rows,
    kappaMin: version.kappaMin,
    kappaMax: version.kappaMax,
    hasBinEdges: version.hasBinEdges,
    sha256: version.sha256,
    checks: presentChecks(version),
  };
}

export function presentSummary(
  measurement: MeasurementHead,
  version: VersionHead,
  uploadedBy: string,
): MeasurementSummary {
  return {
    id: measurement.id,
    name: measurement.name,
    description: measurement.description,
    version: version.version,
    blind: measurement.blind,
    simulated: measurement.simulated,
    rows: version.rows,
    kappaMin: version.kappaMin,
    kappaMax: version.kappaMax,
    uploadedBy,
    uploadedAt: version.createdAt.toISOString(),
  };
}

/** The whole measurement; while it is blind, no value of S is in it. */
export function presentMeasurement(
  measurement: MeasurementHead,
  version: VersionHead,
  numbers: VersionNumbers,
  people: { uploadedBy: string; may: readonly string[] },
): Measurement {
  const { kappa, kappaLo, kappaHi, S, covariance } = numbers;
  const rows = kappa.length;
  return {
    ...presentSummary(measurement, version, people.uploadedBy),
    groupId: measurement.groupId,
    sha256: version.sha256,
    hasBinEdges: version.hasBinEdges,
    covarianceSource: covarianceSources.find((source) => source === version.covarianceSource) ?? 'file',
    mockCount: version.mockCount,
    files: version.files.map(({ part, fileName, bytes, sha256 }) => ({ part, fileName, bytes, sha256 })),
    checks: presentChecks(version),
    points: {
      kappa: [...kappa],
      kappaLo: kappaLo && [...kappaLo],
      kappaHi: kappaHi && [...kappaHi],
      S: Array.from(S, (value) => (measurement.blind ? null : value)),
      sigma: Array.from(kappa, (_, i) => Math.sqrt(covariance[i * rows + i])),
    },
    covariance:
      rows > covarianceShownTo
        ? null
        : Array.from({ length: rows }, (_, i) => [...covariance.subarray(i * rows, (i + 1) * rows)]),
    may: [...people.may],
  };
}
