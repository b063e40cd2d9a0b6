import { extremeEigenvalues, type ExtremeEigenvalues } from './eigenvalues';
import { finding, showNumber } from './errors';
import type { Finding, NumericMatrix, Part } from './types';

/** Elements on both sides of the diagonal may differ by this share of √(C_ii C_jj): rounding, not another matrix. */
const SYMMETRY = 1e-8;
/** Condition numbers of the correlation matrix: usable, and beyond what double precision can invert. */
const CONDITION_WARNING = 1e6;
const CONDITION_ERROR = 1e13;
/** Standard errors written with few digits agree with the diagonal within this share. */
const ERRORS_AGREE = 0.01;

/** Lower triangular factor of C = L·Lᵀ, row by row, or the order of the first leading minor that is not positive (1-based). */
export type Factorisation = { factor: Float64Array; logDeterminant: number } | { failedMinor: number };

/**
 * Cholesky factor of a symmetric p × p matrix (row-major). A pivot at or below p·2⁻⁵² times its diagonal element is
 * rounding error and counts as not positive. `logDeterminant` = 2 Σ ln L_ii.
 */
export function factorise(matrix: Float64Array, p: number): Factorisation {
  const factor = new Float64Array(p * p);
  let logDeterminant = 0;
  for (let i = 0; i < p; i += 1) {
    for (let j = 0; j <= i; j += 1) {
      let sum = matrix[i * p + j];
      for (let k = 0; k < j; k += 1) sum -= factor[i * p + k] * factor[j * p + k];
      if (j < i) factor[i * p + j] = sum / factor[j * p + j];
      else if (sum > p * Number.EPSILON * matrix[i * p + i]) {
        factor[i * p + i] = Math.sqrt(sum);
        logDeterminant += Math.log(sum);
      } else return { failedMinor: i + 1 };
    }
  }
  return { factor, logDeterminant };
}

/** What is known of a covariance beside its findings. */
export interface CovarianceCheck {
  /** Symmetric, row-major, in the order of the file; null if it cannot be used. */
  covariance: Float64Array | null;
  /** ln det C. */
  logDeterminant: number | null;
  /** Condition number of C; null if it cannot be used. */
  condition: number | null;
  /** Condition number of its correlation matrix, in which the errors' different sizes drop out. */
  correlationCondition: number | null;
  findings: Finding[];
}

export interface CovarianceOptions {
  /** Standard errors in the order of the matrix, to compare with its diagonal. */
  sigma?: Float64Array | null;
  /** Which upload the matrix came from. */
  part?: Part;
  /** Number of mocks it was estimated from: its diagonal then scatters. */
  mockCount?: number | null;
}

/**
 * Checks a covariance for p bins: size, finite elements, symmetry, positive definiteness, condition, and its diagonal against
 * the standard errors. The covariance is given back symmetrised, or null if a finding is an error.
 */
export function checkCovariance(
  matrix: NumericMatrix,
  p: number,
  options: CovarianceOptions = {},
): CovarianceCheck {
  const { part = 'covariance', sigma = null, mockCount = null } = options;
  const refused = (findings: Finding[]): CovarianceCheck => ({
    covariance: null,
    logDeterminant: null,
    condition: null,
    correlationCondition: null,
    findings,
  });
  const size = checkSize(matrix, p, part);
  if (size) return refused([size]);
  // A cell that is no number has its finding from reading.
  if (!matrix.data.every(Number.isFinite)) return refused([]);
  const symmetric = symmetrise(matrix, p, part);
  const findings = symmetric.findings;
  if (!symmetric.covariance) return refused(findings);
  const { covariance } = symmetric;
  const factorisation = factorise(covariance, p);
  if ('failedMinor' in factorisation) {
    return refused([
      ...findings,
      notPositiveDefinite(matrix, covariance, p, factorisation.failedMinor, part),
    ]);
  }
  findings.push(finding('covariance-ok', 'ok', 'Covariance symmetric and positive definite.', { part }));
  const { condition, correlationCondition } = conditionNumbers(covariance, p);
  findings.push(conditionFinding(condition, correlationCondition, part));
  if (sigma) findings.push(...compareErrors(covariance, sigma, part, mockCount));
  const usable = !findings.some(({ level }) => level === 'error');
  return {
    covariance: usable ? covariance : null,
    logDeterminant: factorisation.logDeterminant,
    condition,
    correlationCondition,
    findings,
  };
}

function checkSize({ rows, columns, data }: NumericMatrix, p: number, part: Part): Finding | null {
  if (rows === p && columns === p) return null;
  const message = `The covariance has ${showNumber(rows)} rows of ${showNumber(columns)}; the measurement has ${showNumber(p)} bins.`;
  if (columns === 3 && (rows === p * p || rows === (p * (p + 1)) / 2)) {
    return finding(
      'covariance-size',
      'error',
      message,
      { part },
      'Write the list of elements as a full matrix.',
    );
  }
  if (
    rows === p &&
    columns === p + 1 &&
    data.every((value, k) => k % columns !== 0 || value === data[0] + k / columns)
  ) {
    return finding(
      'covariance-size',
      'error',
      message,
      { part, column: 1 },
      'Leave out the first column: it counts the rows.',
    );
  }
  return finding('covariance-size', 'error', message, { part });
}

function symmetrise(
  matrix: NumericMatrix,
  p: number,
  part: Part,
): { covariance: Float64Array | null; findings: Finding[] } {
  const { data, lines } = matrix;
  const covariance = data.slice();
  let worst = 0;
  let [row, column] = [0, 0];
  for (let i = 0; i < p; i += 1) {
    for (let j = 0; j < i; j += 1) {
      const difference = Math.abs(data[i * p + j] - data[j * p + i]);
      if (difference === 0) continue;
      const scale = Math.sqrt(Math.abs(data[i * p + i] * data[j * p + j]));
      const relative = scale > 0 ? difference / scale : Infinity;
      if (relative > worst) [worst, row, column] = [relative, j, i];
      covariance[i * p + j] = covariance[j * p + i] = (data[i * p + j] + data[j * p + i]) / 2;
    }
  }
  if (worst === 0) return { covariance, findings: [] };
  const place = { part, line: lines[row], column: column + 1 };
  const where = `row ${row + 1}, column ${column + 1}`;
  if (worst <= SYMMETRY) {
    const message = `The covariance is symmetric but for rounding, at most ${showNumber(worst)} at ${where}.`;
    return { covariance, findings: [finding('covariance-symmetrised', 'warning', message, place)] };
  }
  const message = `The covariance is not symmetric: the elements at ${where} and across the diagonal differ.`;
  return { covariance: null, findings: [finding('covariance-asymmetric', 'error', message, place)] };
}

function notPositiveDefinite(
  matrix: NumericMatrix,
  covariance: Float64Array,
  p: number,
  minor: number,
  part: Part,
): Finding {
  const place = { part, line: matrix.lines[minor - 1], column: minor };
  const diagonal = covariance[(minor - 1) * p + minor - 1];
  if (diagonal <= 0) {
    const message = `The variance of bin ${minor} is not above zero, so the covariance is not positive definite.`;
    return finding(
      'covariance-not-positive-definite',
      'error',
      message,
      place,
      'Give variances, which are positive, on the diagonal.',
    );
  }
  const { smallest } = extremeEigenvalues(covariance, p);
  const message =
    `The covariance is not positive definite: its leading minor of order ${minor} is not above zero; ` +
    `the smallest eigenvalue is ${showNumber(smallest)}.`;
  return finding('covariance-not-positive-definite', 'error', message, place);
}

function conditionNumbers(
  covariance: Float64Array,
  p: number,
): { condition: number; correlationCondition: number } {
  const sd = Float64Array.from({ length: p }, (_, i) => Math.sqrt(covariance[i * p + i]));
  const correlation = covariance.map((value, k) => value / (sd[Math.floor(k / p)] * sd[k % p]));
  const ratio = ({ smallest, largest }: ExtremeEigenvalues) => (smallest > 0 ? largest / smallest : Infinity);
  return {
    condition: ratio(extremeEigenvalues(covariance, p)),
    correlationCondition: ratio(extremeEigenvalues(correlation, p)),
  };
}

function conditionFinding(condition: number, correlation: number, part: Part): Finding {
  const message = `Condition number of the covariance is ${showNumber(condition)}, of its correlations ${showNumber(correlation)}.`;
  if (correlation > CONDITION_ERROR) return finding('covariance-ill-conditioned', 'error', message, { part });
  if (correlation <= CONDITION_WARNING) return finding('condition-ok', 'ok', message, { part });
  const remedy = 'Usable. Below 10^6 would be safer: join the two most strongly correlated bins.';
  return finding('covariance-ill-conditioned', 'warning', message, { part }, remedy);
}

/** √C_ii against the standard errors. A covariance of N mocks scatters by 1/√(2(N−1)); five times that is allowed. */
function compareErrors(
  covariance: Float64Array,
  sigma: Float64Array,
  part: Part,
  mockCount: number | null,
): Finding[] {
  const p = sigma.length;
  if (!sigma.every((value) => value > 0)) return [];
  const allowed = Math.max(
    ERRORS_AGREE,
    mockCount === null ? 0 : 5 / Math.sqrt(2 * Math.max(1, mockCount - 1)),
  );
  let [worst, bin, differing] = [0, 0, 0];
  let variances = true;
  for (let i = 0; i < p; i += 1) {
    const variance = covariance[i * p + i];
    const ratio = Math.sqrt(variance) / sigma[i];
    const off = Math.abs(Math.log(ratio));
    if (off > allowed) differing += 1;
    if (off > worst) [worst, bin] = [off, i];
    if (Math.abs(Math.log(variance / sigma[i])) > allowed) variances = false;
  }
  if (differing === 0) {
    return [
      finding('errors-agree', 'ok', 'The standard errors agree with the diagonal of the covariance.', {
        part,
      }),
    ];
  }
  if (variances) {
    const message = 'The column of standard errors equals the diagonal itself: it seems to hold variances.';
    return [
      finding(
        'errors-differ',
        'warning',
        message,
        { part },
        'Give standard errors, the square roots of variances.',
      ),
    ];
  }
  const share = showNumber(Math.sqrt(covariance[bin * p + bin]) / sigma[bin]);
  const message =
    `The standard errors of ${showNumber(differing)} of ${showNumber(p)} bins differ from the diagonal of the covariance; ` +
    `the largest ratio is ${share}, in bin ${bin + 1}.`;
  return [finding('errors-differ', 'warning', message, { part })];
}

/** Rows and columns of a p × p matrix in another order: result[i, j] = matrix[order[i], order[j]]. Also cuts, if order is shorter. */
export function permuteMatrix(matrix: Float64Array, p: number, order: ArrayLike<number>): Float64Array {
  const n = order.length;
  const result = new Float64Array(n * n);
  for (let i = 0; i < n; i += 1) {
    for (let j = 0; j < n; j += 1) result[i * n + j] = matrix[order[i] * p + order[j]];
  }
  return result;
}
