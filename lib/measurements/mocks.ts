import { finding, FindingList, showNumber } from './errors';
import { mockDistances } from './mock-distances';
import type { Finding, NumericMatrix } from './types';

/** A mock is an outlier if some bin lies this many robust standard deviations from the median of all mocks. */
const OUTLIER = 8;

/** Nor is it like the others if one of all mocks lies as far by chance with less than this probability. */
const CHANCE = 1e-3;

/** Mean and covariance of mocks, in the order of their columns; null where a finding is an error. */
export interface MockCovariance {
  covariance: Float64Array | null;
  mean: Float64Array | null;
  findings: Finding[];
}

/** Hartlap factor (N − p − 2)/(N − 1) of the inverse of a covariance of p bins from N mocks. */
export function hartlapFactor(mockCount: number, p: number): number {
  return (mockCount - p - 2) / (mockCount - 1);
}

/**
 * Findings on the number of mocks: N ≤ p + 4 is an error (the t distribution and Hartlap's factor need more),
 * N < 2p a warning.
 */
export function checkMockCount(mockCount: number, p: number, part: 'mocks' | 'covariance'): Finding {
  const [count, bins] = [showNumber(mockCount), showNumber(p)];
  if (mockCount <= p + 4) {
    const message = `There are ${count} mocks for ${bins} bins; at least ${showNumber(p + 5)} are needed.`;
    return finding(
      'too-few-mocks',
      'error',
      message,
      { part },
      `Add mocks until there are ${p + 5} or more, or join bins.`,
    );
  }
  const factor = hartlapFactor(mockCount, p).toFixed(3);
  const message = `Mocks against bins: ${count} for ${bins}, factor ${factor}.`;
  return finding(
    mockCount < 2 * p ? 'few-mocks' : 'mocks-ok',
    mockCount < 2 * p ? 'warning' : 'ok',
    message,
    { part },
  );
}

/**
 * Sample mean and covariance of N mocks of p bins, C_ij = Σ_n (x_ni − x̄_i)(x_nj − x̄_j)/(N − 1), two passes. Checks the shape, the
 * number of mocks, copies, bins that never vary and outlying mocks. Cells that are no numbers have their findings from reading.
 */
export function covarianceFromMocks(mocks: NumericMatrix, p: number): MockCovariance {
  const shape = checkShape(mocks, p);
  if (shape) return { covariance: null, mean: null, findings: [shape] };
  const n = mocks.rows;
  const findings = [checkMockCount(n, p, 'mocks')];
  const finite = mocks.data.every(Number.isFinite);
  if (findings[0].level === 'error' || !finite) return { covariance: null, mean: null, findings };
  findings.push(...findCopies(mocks));
  const { columns, mean } = centre(mocks);
  const covariance = covarianceOf(columns);
  findings.push(...outlyingMocks(mocks, columns, covariance));
  return { covariance, mean, findings };
}

/** Mocks that lie apart, in one bin or by the distance of all of them, with the statistic that says so. */
function outlyingMocks(mocks: NumericMatrix, columns: Float64Array[], covariance: Float64Array): Finding[] {
  const n = mocks.rows;
  const apart = new Map(
    findOutliers(columns).map((mock) => [
      mock,
      `Mock ${mock + 1} lies more than ${OUTLIER} robust standard deviations from the others in some bin.`,
    ]),
  );
  const distances = mockDistances(columns, covariance) ?? [];
  for (const { mock, squared, probability } of distances) {
    if (n * probability >= CHANCE || apart.has(mock)) continue;
    apart.set(
      mock,
      `Mock ${mock + 1} lies far from the others: its squared Mahalanobis distance to their mean, by their covariance without it, is ` +
        `${showNumber(squared)} in ${showNumber(columns.length)} bins; by chance one of ${showNumber(n)} mocks lies as far with ` +
        `probability ${showNumber(n * probability)} (Hotelling).`,
    );
  }
  const outlying = new FindingList();
  for (const [mock, message] of [...apart].sort(([a], [b]) => a - b)) {
    outlying.add(() =>
      finding('outlying-mock', 'warning', message, { part: 'mocks', line: mocks.lines[mock] }),
    );
  }
  if (outlying.count > 0 || distances.length === 0) return outlying.toFindings();
  const largest = distances.reduce((a, b) => (b.squared > a.squared ? b : a));
  const message =
    `No mock lies apart: the largest squared Mahalanobis distance to the others, ${showNumber(largest.squared)} of mock ` +
    `${largest.mock + 1}, is one of ${showNumber(n)}.`;
  return [finding('mocks-alike', 'ok', message, { part: 'mocks' })];
}

function checkShape({ rows, columns, data }: NumericMatrix, p: number): Finding | null {
  if (columns === p) return null;
  const part = 'mocks' as const;
  const sizes = `The file has ${showNumber(rows)} rows of ${showNumber(columns)}; the measurement has ${showNumber(p)} bins`;
  if (rows === p) return finding('mocks-transposed', 'error', `${sizes}: it is transposed.`, { part });
  if (columns === p + 1 && data.every((value, k) => k % columns !== 0 || value === data[0] + k / columns)) {
    return finding(
      'mocks-size',
      'error',
      `${sizes}.`,
      { part, column: 1 },
      'Leave out the first column: it counts the rows.',
    );
  }
  return finding('mocks-size', 'error', `${sizes}.`, { part });
}

/** Rows that equal an earlier row in every number. */
function findCopies({ rows, columns, data, lines }: NumericMatrix): Finding[] {
  const copies = new FindingList();
  const seen = new Map<number, number[]>();
  const bits = new Uint32Array(data.buffer, data.byteOffset, data.length * 2);
  for (let row = 0; row < rows; row += 1) {
    // FNV-1a over the numbers' bits finds candidates; every candidate is compared number by number.
    let hash = 0x811c9dc5;
    for (let k = row * columns * 2; k < (row + 1) * columns * 2; k += 1)
      hash = Math.imul(hash ^ bits[k], 0x01000193);
    const before = seen.get(hash) ?? [];
    const same = before.find((other) => {
      for (let j = 0; j < columns; j += 1) {
        if (data[other * columns + j] !== data[row * columns + j]) return false;
      }
      return true;
    });
    if (same === undefined) seen.set(hash, [...before, row]);
    else {
      const message = `Mock ${row + 1} is a copy of mock ${same + 1}.`;
      copies.add(() => finding('duplicate-mocks', 'warning', message, { part: 'mocks', line: lines[row] }));
    }
  }
  return copies.toFindings();
}

/** The mocks by column with their mean taken out. */
function centre({ rows, columns, data }: NumericMatrix): { columns: Float64Array[]; mean: Float64Array } {
  const mean = new Float64Array(columns);
  for (let row = 0; row < rows; row += 1) {
    for (let j = 0; j < columns; j += 1) mean[j] += data[row * columns + j];
  }
  for (let j = 0; j < columns; j += 1) mean[j] /= rows;
  const centred = Array.from(mean, (value, j) =>
    Float64Array.from({ length: rows }, (_, row) => data[row * columns + j] - value),
  );
  return { columns: centred, mean };
}

/** Mocks in a block: five columns of them lie in a processor's nearest cache. */
const BLOCK = 512;

/**
 * Four elements at a time: their sums don't wait for each other, and each still adds up mock by mock. Right of the
 * diagonal the last of a row is computed over again.
 */
function covarianceOf(columns: Float64Array[]): Float64Array {
  const p = columns.length;
  const n = columns[0].length;
  const covariance = new Float64Array(p * p);
  for (let from = 0; from < n; from += BLOCK) {
    const block = columns.map((column) => column.subarray(from, from + BLOCK));
    for (let i = 0; i < p; i += 1) {
      for (let j = 0; j <= i; j += 4) addProducts(block, i, j, covariance);
    }
  }
  for (let i = 0; i < p; i += 1) {
    for (let j = 0; j <= i; j += 1) {
      covariance[i * p + j] = covariance[j * p + i] = covariance[i * p + j] / (n - 1);
    }
  }
  return covariance;
}

/** Adds the products of column i with columns j to j + 3, none beyond i, to row i of the sums. */
function addProducts(columns: Float64Array[], i: number, j: number, sums: Float64Array): void {
  const row = i * columns.length;
  const [j1, j2, j3] = [Math.min(j + 1, i), Math.min(j + 2, i), Math.min(j + 3, i)];
  const [a, b0, b1, b2, b3] = [columns[i], columns[j], columns[j1], columns[j2], columns[j3]];
  let [s0, s1, s2, s3] = [sums[row + j], sums[row + j1], sums[row + j2], sums[row + j3]];
  for (let mock = 0; mock < a.length; mock += 1) {
    const value = a[mock];
    s0 += value * b0[mock];
    s1 += value * b1[mock];
    s2 += value * b2[mock];
    s3 += value * b3[mock];
  }
  sums[row + j] = s0;
  sums[row + j1] = s1;
  sums[row + j2] = s2;
  sums[row + j3] = s3;
}

/** Mocks with a bin beyond `OUTLIER` × 1.4826 MAD of the median; that scale is a normal distribution's standard deviation. */
function findOutliers(columns: Float64Array[]): number[] {
  const outliers = new Set<number>();
  for (const column of columns) {
    const middle = median(column);
    const scale = 1.4826 * median(column.map((value) => Math.abs(value - middle)));
    if (scale === 0) continue;
    column.forEach((value, mock) => {
      if (Math.abs(value - middle) > OUTLIER * scale) outliers.add(mock);
    });
  }
  return [...outliers].sort((a, b) => a - b);
}

/** Median; the mean of the two middle values where the number is even. NaN for none. */
export function median(values: Float64Array): number {
  const sorted = values.slice().sort();
  const middle = sorted.length >> 1;
  return sorted.length % 2 === 1 ? sorted[middle] : (sorted[middle - 1] + sorted[middle]) / 2;
}
