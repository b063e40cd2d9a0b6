import type { Measurement as MeasurementRow, MeasurementVersion } from '@/models';
import type { TheoryParts } from '@/lib/measurements';
import {
  checkSchema,
  covarianceSources,
  type Check,
  type Measurement,
  type Correlation,
  type MeasurementCreated,
  type MeasurementListed,
  type MeasurementTheory,
  type MeasurementSummary,
  type MeasurementVersionLine,
  type RestingNotebook,
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
  | 'truth'
  | 'spectrum'
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
  theory: TheoryParts;
}

/** Above this many bins the answer would be larger than a page can use. */
const covarianceShownTo = 200;
/** A window of so many numbers and more stays on the server. */
const matrixShownTo = covarianceShownTo ** 2;

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

const sourceOf = ({ covarianceSource }: Pick<VersionHead, 'covarianceSource'>) =>
  covarianceSources.find((source) => source === covarianceSource) ?? 'file';

export function presentSummary(
  measurement: MeasurementHead,
  version: VersionHead,
  uploadedBy: string,
  notebooks: number,
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
    covarianceSource: sourceOf(version),
    mockCount: version.mockCount,
    notebooks,
    uploadedBy,
    uploadedAt: version.createdAt.toISOString(),
  };
}

/** The whole measurement; while it is blind, no value of S is in it. */
export function presentMeasurement(
  measurement: MeasurementHead,
  version: VersionHead,
  numbers: VersionNumbers,
  around: {
    uploadedBy: string;
    versions: MeasurementVersionLine[];
    resting: RestingNotebook[];
    may: readonly string[];
  },
): Measurement {
  const { kappa, kappaLo, kappaHi, S, covariance } = numbers;
  const rows = kappa.length;
  return {
    ...presentSummary(measurement, version, around.uploadedBy, around.resting.length),
    groupId: measurement.groupId,
    sha256: version.sha256,
    hasBinEdges: version.hasBinEdges,
    newest: Math.max(...around.versions.map((line) => line.version)),
    versions: around.versions,
    resting: around.resting,
    spectrum: version.spectrum ?? null,
    truth: measurement.blind ? null : version.truth,
    files: version.files.map(({ part, fileName, bytes, sha256 }) => ({ part, fileName, bytes, sha256 })),
    checks: presentChecks(version),
    points: {
      kappa: [...kappa],
      kappaLo: kappaLo && [...kappaLo],
      kappaHi: kappaHi && [...kappaHi],
      S: Array.from(S, (value) => (measurement.blind ? null : value)),
      sigma: sigmaOf(numbers),
    },
    covariance:
      rows > covarianceShownTo
        ? null
        : Array.from({ length: rows }, (_, i) => [...covariance.subarray(i * rows, (i + 1) * rows)]),
    theory: presentTheory(numbers),
    may: [...around.may],
  };
}

/** Rows of a matrix; null where it has more numbers than a page can use. */
const rowsOf = (matrix: Float64Array, rows: number): number[][] =>
  Array.from({ length: rows }, (_, i) => {
    const width = matrix.length / rows;
    return [...matrix.subarray(i * width, (i + 1) * width)];
  });

/** Nothing of it is data: window, columns and theory covariance are shown of a blind measurement too. */
function presentTheory({ kappa, theory }: VersionNumbers): MeasurementTheory | null {
  const { window, columns, covariance } = theory;
  if (!window && columns.length === 0 && !covariance) return null;
  const rows = kappa.length;
  return {
    window: window && {
      kappaLo: window.lo && [...window.lo],
      kappaHi: window.hi && [...window.hi],
      kappa: [...window.kappa],
      matrix: window.matrix.length > matrixShownTo ? null : rowsOf(window.matrix, rows),
    },
    columns: columns.map(({ name, values }) => ({ name, values: [...values] })),
    sigma: covariance && Array.from(kappa, (_, i) => Math.sqrt(Math.max(0, covariance[i * rows + i]))),
    covariance: covariance && (rows > covarianceShownTo ? null : rowsOf(covariance, rows)),
  };
}

export function presentVersion(
  version: VersionHead,
  uploadedBy: string,
  fits: number,
): MeasurementVersionLine {
  return {
    version: version.version,
    rows: version.rows,
    kappaMin: version.kappaMin,
    kappaMax: version.kappaMax,
    covarianceSource: sourceOf(version),
    mockCount: version.mockCount,
    sha256: version.sha256,
    uploadedBy,
    uploadedAt: version.createdAt.toISOString(),
    fits,
  };
}

const sigmaOf = ({ kappa, covariance }: VersionNumbers): number[] =>
  Array.from(kappa, (_, i) => Math.sqrt(covariance[i * kappa.length + i]));

export function presentListed(
  measurement: MeasurementHead,
  version: VersionHead,
  numbers: VersionNumbers,
  around: { uploadedBy: string; notebooks: number },
): MeasurementListed {
  const checks = presentChecks(version);
  return {
    ...presentSummary(measurement, version, around.uploadedBy, around.notebooks),
    checks: {
      warnings: checks.filter(({ level }) => level === 'warning').length,
      passed: checks.filter(({ level }) => level === 'ok').length,
    },
    points: {
      kappa: [...numbers.kappa],
      S: Array.from(numbers.S, (value) => (measurement.blind ? null : value)),
      sigma: sigmaOf(numbers),
    },
  };
}

/** C_ij / √(C_ii C_jj) below the diagonal; it holds no value of S, so a blind measurement shows it too. */
export function presentCorrelation(version: VersionHead, numbers: VersionNumbers): Correlation {
  const rows = numbers.kappa.length;
  const sigma = sigmaOf(numbers);
  const values: number[] = [];
  for (let i = 1; i < rows; i++) {
    for (let j = 0; j < i; j++) {
      values.push(Math.round((numbers.covariance[i * rows + j] / (sigma[i] * sigma[j])) * 1e5) / 1e5);
    }
  }
  return {
    version: version.version,
    rows,
    correlated: sourceOf(version) !== 'errors',
    mockCount: version.mockCount,
    kappa: [...numbers.kappa],
    // A rounded −0 is no correlation.
    values: values.map((value) => value + 0),
  };
}
