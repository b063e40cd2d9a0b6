import { completeMapping, recogniseColumns } from './columns';
import { checkCovariance, permuteMatrix } from './covariance';
import { finding, FindingList, MeasurementError, showNumber } from './errors';
import { applyMapping, summarise } from './measurement';
import { checkMockCount, covarianceFromMocks } from './mocks';
import { parseMatrix } from './parse-matrix';
import { parseMeasurement } from './parse-measurement';
import { findSuspiciousPoints } from './suspicious-points';
import { readTheoryParts, type TheoryInput, type TheoryParts } from './theory-parts';
import type {
  ColumnMapping,
  Finding,
  Measurement,
  MeasurementSummary,
  NumericMatrix,
  ParsedTable,
  PowerSpectrum,
  ResolvedSpectrum,
} from './types';

/**
 * Most bins of a measurement. The checks of a full covariance grow as the cube of the bins, and a fit's steps as their
 * square: 500 are checked within seconds, and are ten times what squeezed triangles are usually binned in.
 */
export const MAX_BINS = 500;

/** A file as it was handed in. */
export interface UploadedFile {
  bytes: Uint8Array;
  name: string;
}

export interface PreflightInput extends Omit<TheoryInput, 'maxBytes'> {
  /** The measurement, as bytes or as already read. */
  file: UploadedFile | ParsedTable;
  covariance?: UploadedFile | NumericMatrix | null;
  /** One row a mock, one column a bin, in the order of the file's rows. */
  mocks?: UploadedFile | NumericMatrix | null;
  /** Recognised by names where it is left out. */
  mapping?: ColumnMapping | null;
  /** The power spectrum by which a bispectrum B becomes S; its covariance and mocks are of B too. */
  spectrum?: PowerSpectrum | null;
  /** Number of mocks from which a covariance was estimated. */
  mockCount?: number | null;
  /** Leaves values of the measurement out of every message. */
  withoutValues?: boolean;
  /** Largest file, bytes; 64 MB unless given. */
  maxBytes?: number;
}

export type CovarianceSource = 'file' | 'mocks' | 'errors';

/** Everything that is stored of a measurement that passed. Matrices are row-major in ascending κ. */
export interface PreflightPassed {
  ok: true;
  table: ParsedTable;
  mapping: ColumnMapping;
  measurement: Measurement;
  summary: MeasurementSummary;
  /** p × p. */
  covariance: Float64Array;
  /** Mocks behind the covariance; null if it is taken as known. */
  mockCount: number | null;
  covarianceSource: CovarianceSource;
  /** Mean of the mocks, if there were any. */
  mockMean: Float64Array | null;
  /** What a bispectrum was turned into S by; null where the file gives S. */
  spectrum: ResolvedSpectrum | null;
  /** Window, columns and theory covariance; empty where none came. */
  theory: TheoryParts;
  checks: Finding[];
}

/** A measurement that did not pass: nothing of it may be stored. What could be read is there to be looked at. */
export interface PreflightRefused {
  ok: false;
  table: ParsedTable | null;
  mapping: ColumnMapping | null;
  measurement: Measurement | null;
  summary: MeasurementSummary | null;
  checks: Finding[];
}

export type PreflightResult = PreflightPassed | PreflightRefused;

const levels = { error: 0, warning: 1, note: 2, ok: 3 };

/** Runs a step; a MeasurementError becomes a finding, anything else is a fault of the program and passes through. */
function attempt<T>(checks: Finding[], step: () => T): T | null {
  try {
    return step();
  } catch (error) {
    if (!(error instanceof MeasurementError)) throw error;
    checks.push(error.toFinding());
    return null;
  }
}

/**
 * Reads a measurement and its covariance or mocks and checks them against each other. Never throws for what a file holds: every
 * fault is a finding, and with one of level error the result is `ok: false`. Findings come by level, errors first.
 */
export function preflight(input: PreflightInput): PreflightResult {
  const checks: Finding[] = [];
  const withoutValues = input.withoutValues ?? false;
  const table = attempt(checks, () =>
    'bytes' in input.file
      ? parseMeasurement(input.file.bytes, input.file.name, { maxBytes: input.maxBytes, withoutValues })
      : input.file,
  );
  const mapping = table && findMapping(checks, table, input.mapping ?? null);
  const found = table ? relevantFindings(table, mapping) : [];
  checks.push(...(withoutValues ? found.map(withhold) : found));
  const given = input.spectrum ?? null;
  const applied = table && mapping && attempt(checks, () => applyMapping(table, mapping, given));
  if (given && mapping && mapping.B === undefined) {
    const message = 'A power spectrum was given, and the file holds the shape function S.';
    checks.push(finding('spectrum-unused', 'warning', message, { part: 'file' }));
  }
  const measurement = applied?.measurement ?? null;
  if (applied) checks.push(...applied.findings);
  if (table) checks.push(...checkSize(table));
  const factors = applied?.conversion?.factors ?? null;
  const known = resolveCovariance(input, checks, measurement, table, factors);
  const theory =
    measurement && readTheoryParts(input, measurement, known?.covariance ?? null, factors, checks);
  if (table && measurement) checks.push(...passedChecks(checks, measurement));
  if (table && measurement && known) {
    checks.push(...suspiciousPoints(table, measurement, known.covariance, withoutValues));
  }
  checks.sort((a, b) => levels[a.level] - levels[b.level]);
  const summary = measurement && summarise(measurement);
  if (table && mapping && measurement && summary && known && theory && !hasErrors(checks)) {
    const spectrum = applied?.conversion?.spectrum ?? null;
    return { ok: true, table, mapping, measurement, summary, spectrum, ...known, theory, checks };
  }
  return { ok: false, table, mapping, measurement, summary, checks };
}

function hasErrors(checks: Finding[]): boolean {
  return checks.some(({ level }) => level === 'error');
}

function findMapping(
  checks: Finding[],
  table: ParsedTable,
  given: ColumnMapping | null,
): ColumnMapping | null {
  if (given) return attempt(checks, () => completeMapping(table, given));
  const { mapping, findings } = recogniseColumns(table);
  checks.push(...findings);
  return findings.length > 0 ? null : mapping;
}

/** A file may have been read with values in its messages before it was known to be blind: the quoted cell goes. */
function withhold(found: Finding): Finding {
  return { ...found, message: found.message.replace(/: “.*”\.$/, '.') };
}

/** What reading found; a bad cell in a column that is not used stops nothing. */
function relevantFindings(table: ParsedTable, mapping: ColumnMapping | null): Finding[] {
  const used = new Set(Object.values(mapping ?? {}).map((column) => Number(column) + 1));
  return table.findings.map((found) => {
    if (!mapping || found.column === undefined || used.has(found.column)) return found;
    const isCell =
      found.level === 'error' || found.code === 'text-column' || found.code === 'duplicate-header';
    if (!isCell) return found;
    return { ...found, level: 'note' as const, remedy: 'Nothing has to be done: the column is not used.' };
  });
}

function checkSize({ rows, lines }: ParsedTable): Finding[] {
  const part = 'file' as const;
  if (rows < 2)
    return [finding('too-few-rows', 'error', 'The file has a single row.', { part, line: lines[0] })];
  if (rows <= MAX_BINS) return [];
  const message = `The file has ${showNumber(rows)} rows; at most ${showNumber(MAX_BINS)} bins can be used.`;
  return [finding('too-many-bins', 'error', message, { part, line: lines[MAX_BINS] })];
}

type KnownCovariance = Pick<PreflightPassed, 'covariance' | 'mockCount' | 'covarianceSource' | 'mockMean'>;

/** Covariance in ascending κ from whichever source was given; null if none can be used, and then a finding says why. */
function resolveCovariance(
  input: PreflightInput,
  checks: Finding[],
  measurement: Measurement | null,
  table: ParsedTable | null,
  factors: Float64Array | null,
): KnownCovariance | null {
  const options = { maxBytes: input.maxBytes, withoutValues: input.withoutValues };
  const read = (upload: UploadedFile | NumericMatrix, part: 'covariance' | 'mocks') => {
    const matrix = attempt(checks, () =>
      'bytes' in upload ? parseMatrix(upload.bytes, upload.name, { ...options, part }) : upload,
    );
    if (matrix)
      checks.push(...matrix.findings.map((found) => (input.withoutValues ? withhold(found) : found)));
    return matrix;
  };
  const covariance = input.covariance ? read(input.covariance, 'covariance') : null;
  const mocks = input.mocks ? read(input.mocks, 'mocks') : null;
  if (input.covariance && input.mocks) {
    const message = 'Both a covariance and mocks were handed in.';
    checks.push(finding('covariance-and-mocks', 'error', message, { part: 'covariance' }));
    return null;
  }
  // Against what cannot be read, or is too large, nothing more can be checked.
  if (!measurement || !table || table.rows > MAX_BINS || hasRaggedRows(covariance ?? mocks)) return null;
  if (covariance)
    return fromCovariance(scaled(covariance, factors, true), measurement, input.mockCount ?? null, checks);
  if (mocks) return fromMocks(scaled(mocks, factors, false), measurement, input.mockCount ?? null, checks);
  if (input.covariance || input.mocks) return null;
  return fromErrors(measurement, checks);
}

/**
 * A matrix of B as one of S: every column by its bin's factor, and of a covariance every row too. A new one: what was read may be
 * checked again with another spectrum. Of a wrong size it stays as it is, which is found out next.
 */
function scaled(matrix: NumericMatrix, factors: Float64Array | null, rowsToo: boolean): NumericMatrix {
  const { rows, columns, data } = matrix;
  if (!factors || columns !== factors.length || (rowsToo && rows !== columns)) return matrix;
  const scaledData = data.map((value, k) => {
    const ofRow = rowsToo ? factors[Math.floor(k / columns)] : 1;
    return value * factors[k % columns] * ofRow;
  });
  return { ...matrix, data: scaledData };
}

function hasRaggedRows(matrix: NumericMatrix | null): boolean {
  return matrix?.findings.some(({ code }) => code === 'ragged-row') ?? false;
}

/** Standard errors in the order of the file's rows, as covariance and mocks are. */
function sigmaInFileOrder({ sigma, order }: Measurement): Float64Array | null {
  if (!sigma) return null;
  const result = new Float64Array(sigma.length);
  order.forEach((row, i) => (result[row] = sigma[i]));
  return result;
}

function fromCovariance(
  matrix: NumericMatrix,
  measurement: Measurement,
  mockCount: number | null,
  checks: Finding[],
): KnownCovariance | null {
  const p = measurement.kappa.length;
  if (mockCount !== null) {
    if (Number.isInteger(mockCount) && mockCount > 0) checks.push(checkMockCount(mockCount, p, 'covariance'));
    else {
      const message = 'The number of mocks is not a positive whole number.';
      checks.push(finding('mock-count', 'error', message, { part: 'covariance' }));
    }
  }
  const sigma = sigmaInFileOrder(measurement);
  const result = checkCovariance(matrix, p, { sigma, mockCount });
  checks.push(...result.findings);
  if (!result.covariance) return null;
  const covariance = permuteMatrix(result.covariance, p, measurement.order);
  return { covariance, mockCount, covarianceSource: 'file', mockMean: null };
}

function fromMocks(
  mocks: NumericMatrix,
  measurement: Measurement,
  mockCount: number | null,
  checks: Finding[],
): KnownCovariance | null {
  const p = measurement.kappa.length;
  if (mockCount !== null && mockCount !== mocks.rows) {
    const message = `The number of mocks is given as ${showNumber(mockCount)}; the file has ${showNumber(mocks.rows)}.`;
    checks.push(finding('mock-count-unused', 'warning', message, { part: 'mocks' }));
  }
  const { covariance: data, mean, findings } = covarianceFromMocks(mocks, p);
  checks.push(...findings);
  if (!data || !mean) return null;
  // Rows of this covariance are columns of the mocks and stand on no line of their own.
  const matrix = { rows: p, columns: p, data, lines: new Int32Array(0), findings: [] };
  const options = { sigma: sigmaInFileOrder(measurement), part: 'mocks' as const, mockCount: mocks.rows };
  const result = checkCovariance(matrix, p, options);
  checks.push(...result.findings);
  if (!result.covariance) return null;
  return {
    covariance: permuteMatrix(result.covariance, p, measurement.order),
    mockCount: mocks.rows,
    covarianceSource: 'mocks',
    mockMean: Float64Array.from(measurement.order, (column) => mean[column]),
  };
}

function fromErrors(measurement: Measurement, checks: Finding[]): KnownCovariance | null {
  const { sigma } = measurement;
  if (!sigma) {
    const message = 'The file has no standard errors, and there is neither a covariance nor mocks.';
    checks.push(finding('no-errors', 'error', message, { part: 'file' }));
    return null;
  }
  const message = 'Only standard errors are given: the bins are taken as uncorrelated.';
  checks.push(finding('errors-only', 'warning', message, { part: 'file' }));
  if (!sigma.every((value) => value > 0)) return null;
  const p = sigma.length;
  const covariance = new Float64Array(p * p);
  for (let i = 0; i < p; i += 1) covariance[i * p + i] = sigma[i] ** 2;
  return { covariance, mockCount: null, covarianceSource: 'errors', mockMean: null };
}

/** What was looked for in the file and not found. */
function passedChecks(checks: Finding[], { kappa, kappaLo, sigma }: Measurement): Finding[] {
  const part = 'file' as const;
  const failed = new Set(checks.filter(({ level }) => level === 'error').map(({ code }) => code));
  const none = (...codes: Finding['code'][]) => !codes.some((code) => failed.has(code));
  const passed: Finding[] = [];
  if (
    none(
      'not-a-number',
      'not-finite',
      'empty-cell',
      'ragged-row',
      'mixed-decimals',
      'duplicate-kappa',
      'too-few-rows',
    )
  ) {
    const message = `${showNumber(kappa.length)} rows read, every value a number.`;
    passed.push(finding('rows-ok', 'ok', message, { part }));
  }
  if (
    kappaLo &&
    none('edges-reversed', 'bins-overlap', 'kappa-outside-bin', 'kappa-not-positive', 'kappa-too-large')
  ) {
    passed.push(finding('edges-ok', 'ok', 'Bin edges given, in order, without overlap.', { part }));
  }
  if (sigma?.every((value) => value > 0)) {
    passed.push(finding('sigma-ok', 'ok', 'Standard errors given, all above zero.', { part }));
  }
  return passed;
}

function suspiciousPoints(
  table: ParsedTable,
  measurement: Measurement,
  covariance: Float64Array,
  withoutValues: boolean,
): Finding[] {
  const p = measurement.kappa.length;
  const sigma = Float64Array.from({ length: p }, (_, i) => Math.sqrt(covariance[i * p + i]));
  const list = new FindingList();
  for (const { index, standardErrors } of findSuspiciousPoints(measurement, sigma)) {
    const distance = withoutValues ? 'more than 5' : standardErrors.toFixed(1);
    const message = `One point lies ${distance} standard errors from its neighbours’ smooth trend.`;
    const place = { part: 'file' as const, line: table.lines[measurement.order[index]] };
    list.add(() => finding('suspicious-point', 'warning', message, place));
  }
  if (list.count > 0) return list.toFindings();
  return [
    finding('points-ok', 'ok', 'No point stands out from its neighbours’ smooth trend.', { part: 'file' }),
  ];
}
