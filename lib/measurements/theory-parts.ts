import { recogniseColumns } from './columns';
import { factorise, permuteMatrix } from './covariance';
import { extremeEigenvalues } from './eigenvalues';
import { finding, MeasurementError, showName, showNumber } from './errors';
import { parseMatrix } from './parse-matrix';
import { parseMeasurement } from './parse-measurement';
import type { Finding, Measurement, NumericMatrix, ParsedTable } from './types';

/** A window matrix and where the theory is that it multiplies. */
export interface Window {
  /** p × n, row-major, rows in ascending κ. */
  matrix: Float64Array;
  /** Number of theory bins or points, n. */
  size: number;
  /** Edges of the theory bins; null where the theory is wanted at points. */
  lo: Float64Array | null;
  hi: Float64Array | null;
  /** The theory's points, or the middles √(lo·hi) of its bins. */
  kappa: Float64Array;
}

/** A column that is fitted beside the template, rows in ascending κ. */
export interface LinearColumn {
  name: string;
  values: Float64Array;
}

/** What may come with a measurement to say how theory becomes data. */
export interface TheoryParts {
  window: Window | null;
  columns: LinearColumn[];
  /** Known covariance of what the theory leaves out, p × p; null for none. */
  covariance: Float64Array | null;
}

interface Upload {
  bytes: Uint8Array;
  name: string;
}

export interface TheoryInput {
  window?: Upload | null;
  columns?: Upload | null;
  theoryCovariance?: Upload | null;
  /** Why a column can't have a name, in words that follow it; null for a good one. */
  columnFault?: (name: string) => string | null;
  maxBytes?: number;
}

/** Row sums that differ from 1 by less are 1: files are written with few digits. */
const SUM_IS_ONE = 1e-3;
/** Beyond this W Wᵀ says that some values see the same theory twice. */
const CONDITION_WARNING = 1e6;
/** κ of a file of columns agrees with that of the measurement within this share. */
const SAME_KAPPA = 1e-4;
/** A covariance's smallest eigenvalue may be this share of the largest below zero: rounding. */
const ROUNDING = 1e-10;

/**
 * Reads window, columns and theory covariance and checks them against the measurement and its covariance (ascending κ). Rows come in the
 * order of the measurement's file and leave in ascending κ. Where the file gave a bispectrum, `factors` (file's order) turn columns and theory
 * covariance into the shape function's as they turn the data's; a window acts on the shape function. Faults are added to `checks`; with one
 * of level error nothing is returned.
 */
export function readTheoryParts(
  input: TheoryInput,
  measurement: Measurement,
  covariance: Float64Array | null,
  factors: Float64Array | null,
  checks: Finding[],
): TheoryParts | null {
  const found: Finding[] = [];
  const attempt = <T>(part: Finding['part'], step: () => T): T | null => {
    try {
      return step();
    } catch (error) {
      if (!(error instanceof MeasurementError)) throw error;
      found.push({ ...error.toFinding(), part });
      return null;
    }
  };
  const { maxBytes } = input;
  const matrixOf = ({ bytes, name }: Upload, part: 'window' | 'theoryCovariance'): NumericMatrix | null => {
    const matrix = attempt(part, () => parseMatrix(bytes, name, { part, maxBytes }));
    if (matrix) found.push(...matrix.findings);
    return matrix?.findings.some(({ level }) => level === 'error') ? null : matrix;
  };
  const { order } = measurement;
  let window: Window | null = null;
  if (input.window) {
    const matrix = matrixOf(input.window, 'window');
    window = matrix && attempt('window', () => windowOf(matrix, measurement, found));
  }
  let columns: LinearColumn[] = [];
  if (input.columns) {
    const { bytes, name } = input.columns;
    const table = attempt('columns', () => parseMeasurement(bytes, name, { fewest: 1, maxBytes }));
    if (table) {
      found.push(...table.findings.map((one): Finding => ({ ...one, part: 'columns' })));
      columns =
        attempt('columns', () => columnsOf(table, measurement, factors, input.columnFault, found)) ?? [];
    }
  }
  let added: Float64Array | null = null;
  if (input.theoryCovariance) {
    const matrix = matrixOf(input.theoryCovariance, 'theoryCovariance');
    added =
      matrix && attempt('theoryCovariance', () => addedCovariance(matrix, order, covariance, factors, found));
  }
  checks.push(...found);
  return found.some(({ level }) => level === 'error') ? null : { window, columns, covariance: added };
}

function windowOf(matrix: NumericMatrix, measurement: Measurement, found: Finding[]): Window {
  const { rows, columns: n, data, lines } = matrix;
  const { kappa, kappaLo, kappaHi, order } = measurement;
  const p = kappa.length;
  const head = rows - p;
  const own = head === 0 && n === p;
  if (!own && head !== 1 && head !== 2) {
    const message =
      `The window has ${showNumber(rows)} rows of ${showNumber(n)}; the measurement has ${showNumber(p)} bins, ` +
      `so ${showNumber(p + 2)} rows are due: two of edges, then one a bin.`;
    throw new MeasurementError('window-size', message, { part: 'window' });
  }
  const row = (i: number): Float64Array => data.slice(i * n, (i + 1) * n);
  // Without rows of its own the theory is in the measurement's bins, its columns in the order of the file.
  const theory = own ? order : Int32Array.from({ length: n }, (_, j) => j);
  const [lo, hi] = own ? [kappaLo, kappaHi] : head === 2 ? [row(0), row(1)] : [null, null];
  const points = own ? kappa : lo && hi ? lo.map((low, j) => Math.sqrt(low * hi[j])) : row(0);
  if (!own) checkTheoryBins(lo ?? points, hi, lines);
  const values = new Float64Array(p * n);
  order.forEach((file, i) => {
    for (let j = 0; j < n; j += 1) values[i * n + j] = data[(head + file) * n + theory[j]];
  });
  checkRows(values, p, n, (i) => lines[head + order[i]], found);
  return { matrix: values, size: n, lo, hi, kappa: points };
}

function checkTheoryBins(low: Float64Array, high: Float64Array | null, lines: Int32Array): void {
  for (let j = 0; j < low.length; j += 1) {
    const place = { part: 'window' as const, line: lines[0], column: j + 1 };
    if (!(low[j] > 0)) {
      throw new MeasurementError('window-bins', `κ of theory bin ${j + 1} is not above zero.`, place);
    }
    if (high && !(high[j] > low[j])) {
      const message = `The upper edge of theory bin ${j + 1} is not above its lower edge.`;
      throw new MeasurementError('window-bins', message, { ...place, line: lines[1] });
    }
    const before = high ? high[j - 1] : low[j - 1];
    const joins = high ? low[j] >= before * (1 - 1e-9) : low[j] > before;
    if (j > 0 && !joins) {
      const message = `Theory bin ${j + 1} does not lie above the one before it.`;
      throw new MeasurementError('window-bins', message, place);
    }
  }
}

function checkRows(
  values: Float64Array,
  p: number,
  n: number,
  lineOf: (row: number) => number,
  found: Finding[],
): void {
  const part = 'window' as const;
  const sums = Array.from({ length: p }, (_, i) =>
    values.subarray(i * n, (i + 1) * n).reduce((sum, value) => sum + value, 0),
  );
  const empty = sums.findIndex((_, i) => values.subarray(i * n, (i + 1) * n).every((value) => value === 0));
  if (empty >= 0) {
    const message = `The window’s row for bin ${empty + 1} holds nothing but zeros: no theory would reach it.`;
    throw new MeasurementError('window-empty-row', message, { part, line: lineOf(empty) });
  }
  const [least, most] = [Math.min(...sums), Math.max(...sums)];
  if (Math.abs(least - 1) < SUM_IS_ONE && Math.abs(most - 1) < SUM_IS_ONE) {
    const message = `Window of ${showNumber(p)} bins by ${showNumber(n)} of the theory; every row adds up to 1.`;
    found.push(finding('window-ok', 'ok', message, { part }));
  } else {
    const message =
      `Window of ${showNumber(p)} bins by ${showNumber(n)} of the theory; its rows add up to ` +
      `${showNumber(Number(least.toPrecision(3)))} to ${showNumber(Number(most.toPrecision(3)))}.`;
    found.push(finding('window-row-sums', 'note', message, { part }));
  }
  const square = new Float64Array(p * p);
  for (let i = 0; i < p; i += 1) {
    for (let j = 0; j <= i; j += 1) {
      let sum = 0;
      for (let k = 0; k < n; k += 1) sum += values[i * n + k] * values[j * n + k];
      square[i * p + j] = square[j * p + i] = sum;
    }
  }
  const { smallest, largest } = extremeEigenvalues(square, p);
  const condition = smallest > 0 ? Math.sqrt(largest / smallest) : Infinity;
  if (condition <= CONDITION_WARNING) {
    const message = `Condition number of the window is ${showNumber(Number(condition.toPrecision(3)))}.`;
    found.push(finding('window-condition-ok', 'ok', message, { part }));
  } else {
    const message = 'Some bins see the same theory twice: the rows of the window are not independent.';
    found.push(finding('window-ill-conditioned', 'warning', message, { part }));
  }
}

function columnsOf(
  table: ParsedTable,
  { kappa, kappaLo, kappaHi, order }: Measurement,
  factors: Float64Array | null,
  columnFault: TheoryInput['columnFault'],
  found: Finding[],
): LinearColumn[] {
  const part = 'columns' as const;
  const p = kappa.length;
  if (table.rows !== p) {
    const message = `The file of columns has ${showNumber(table.rows)} rows; the measurement has ${showNumber(p)} bins.`;
    throw new MeasurementError('columns-size', message, { part });
  }
  const { mapping } = recogniseColumns(table);
  const places: [unknown, Float64Array | null][] = [
    [mapping.kappa, kappa],
    [mapping.kappaLo, kappaLo],
    [mapping.kappaHi, kappaHi],
  ];
  const skipped = new Set<number>();
  for (const [place, own] of places) {
    if (typeof place !== 'number') continue;
    skipped.add(place);
    const values = table.data[place];
    const off = own ? order.findIndex((file, i) => !(Math.abs(values[file] / own[i] - 1) < SAME_KAPPA)) : -1;
    if (off >= 0) {
      const message = `κ in the file of columns is not that of the measurement, first in bin ${off + 1}.`;
      throw new MeasurementError('columns-kappa', message, {
        part,
        line: table.lines[order[off]],
        column: place + 1,
      });
    }
  }
  const columns = table.columns.flatMap(({ name }, j) => {
    if (skipped.has(j)) return [];
    const place = { part, line: table.headerLine, column: j + 1 };
    const fault = columnFault?.(name) ?? null;
    if (fault !== null) throw new MeasurementError('column-name', `${showName(name)} ${fault}.`, place);
    const values = Float64Array.from(order, (file) => table.data[j][file] * (factors?.[file] ?? 1));
    if (values.every((value) => value === 0)) {
      const message = `Column ${name} holds nothing but zeros: its coefficient would change nothing.`;
      throw new MeasurementError('column-empty', message, place);
    }
    return [{ name, values }];
  });
  if (columns.length === 0) {
    throw new MeasurementError('columns-size', 'The file of columns has no column beside κ.', { part });
  }
  const names = columns.map(({ name }) => name);
  const one = columns.length === 1 ? 'One column' : `${columns.length} columns`;
  const message = `${one} to be fitted beside the template: ${names.join(', ')}.`;
  found.push(finding('columns-ok', 'ok', message, { part }));
  return columns;
}

function addedCovariance(
  { rows, columns, data, lines }: NumericMatrix,
  order: Int32Array,
  covariance: Float64Array | null,
  factors: Float64Array | null,
  found: Finding[],
): Float64Array {
  const part = 'theoryCovariance' as const;
  const p = order.length;
  if (rows !== p || columns !== p) {
    const message = `The theory covariance has ${showNumber(rows)} rows of ${showNumber(columns)}; the measurement has ${showNumber(p)} bins.`;
    throw new MeasurementError('theory-covariance-size', message, { part });
  }
  const inS = factors ? data.map((value, k) => value * factors[Math.floor(k / p)] * factors[k % p]) : data;
  const out = permuteMatrix(inS, p, order);
  const scale = Math.max(...Array.from({ length: p }, (_, i) => Math.abs(data[i * p + i])));
  for (let i = 0; i < p; i += 1) {
    for (let j = 0; j < i; j += 1) {
      if (Math.abs(data[i * p + j] - data[j * p + i]) > 1e-8 * scale) {
        const message = `The theory covariance is not symmetric: the elements at row ${i + 1}, column ${j + 1} and across the diagonal differ.`;
        throw new MeasurementError('theory-covariance-asymmetric', message, {
          part,
          line: lines[i],
          column: j + 1,
        });
      }
    }
  }
  const { smallest, largest } = extremeEigenvalues(out, p);
  if (smallest < -ROUNDING * Math.abs(largest)) {
    const message =
      'The theory covariance has a negative eigenvalue: some combination of bins would have a negative variance.';
    throw new MeasurementError('theory-covariance-negative', message, { part });
  }
  if (
    covariance &&
    'failedMinor' in
      factorise(
        covariance.map((value, k) => value + out[k]),
        p,
      )
  ) {
    const message = 'With the theory covariance added, the covariance is not positive definite.';
    throw new MeasurementError('theory-covariance-negative', message, { part });
  }
  const shares = covariance
    ? Array.from({ length: p }, (_, i) => Math.sqrt(Math.max(0, out[i * p + i]) / covariance[i * p + i]))
    : [];
  const most = shares.length > 0 ? `, at most ${Math.max(...shares).toFixed(2)} of the data’s error` : '';
  found.push(
    finding('theory-covariance-ok', 'ok', `Theory covariance symmetric, no eigenvalue below zero${most}.`, {
      part,
    }),
  );
  return out;
}
