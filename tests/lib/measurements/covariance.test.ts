import { describe, expect, it } from 'vitest';
import {
  applyCuts,
  checkCovariance,
  covarianceFromMocks,
  findSuspiciousPoints,
  hartlapFactor,
  parseMatrix,
  preflight,
  type Measurement,
} from '@/lib/measurements';
import { errorOf, file, load, loadText, placesOf } from './measurement-files';

const matrix = (text: string, part: 'covariance' | 'mocks' = 'covariance') =>
  parseMatrix(file(text).bytes, 'm', { part });

describe('a covariance', () => {
  it('with rounding on both sides of the diagonal is symmetrised with a warning', () => {
    const check = checkCovariance(matrix('1 0.5\n0.500000001 1\n'), 2);
    expect(placesOf(check.findings, 'warning')).toEqual([['covariance-symmetrised', 1, 2]]);
    expect(check.covariance?.[1]).toBe(0.5000000005);
    expect(check.covariance?.[1]).toBe(check.covariance?.[2]);
  });

  it('beyond rounding is refused', () => {
    expect(placesOf(checkCovariance(matrix('1 0.5\n0.50001 1\n'), 2).findings, 'error')).toEqual([
      ['covariance-asymmetric', 1, 2],
    ]);
  });

  it('without a variance is refused by its bin', () => {
    const { findings } = checkCovariance(matrix('1 0\n0 0\n'), 2);
    expect(placesOf(findings, 'error')).toEqual([['covariance-not-positive-definite', 2, 2]]);
  });

  it('that is singular but for rounding is refused', () => {
    // Third bin = first + second: rank 2, with a last pivot of rounding size.
    const { findings } = checkCovariance(matrix('0.1 0.2 0.3\n0.2 0.7 0.9\n0.3 0.9 1.2\n'), 3);
    expect(placesOf(findings, 'error')).toEqual([['covariance-not-positive-definite', 3, 3]]);
  });

  it('is judged by the condition of its correlations, not by the sizes of its errors', () => {
    const wide = checkCovariance(matrix('1e-12 0\n0 1\n'), 2);
    expect(wide.condition).toBeCloseTo(1e12, -3);
    expect(wide.correlationCondition).toBe(1);
    expect(placesOf(wide.findings, 'ok')).toContainEqual(['condition-ok']);
    const close = checkCovariance(matrix('1 0.9999999\n0.9999999 1\n'), 2);
    expect(placesOf(close.findings, 'warning')).toEqual([['covariance-ill-conditioned']]);
  });

  it('written as a list of elements, or with a counting column, is recognised', () => {
    const list = checkCovariance(matrix('1 1 4\n1 2 0\n2 2 4\n'), 2).findings[0];
    expect([list.code, list.remedy]).toEqual([
      'covariance-size',
      'Write the list of elements as a full matrix.',
    ]);
    const counted = checkCovariance(matrix('1 4 0.5\n2 0.5 4\n'), 2).findings[0];
    expect([counted.code, counted.column]).toEqual(['covariance-size', 1]);
  });
});

describe('mocks', () => {
  const rows = loadText('null-mocks.csv').trim().split('\n');

  it('have the Hartlap factor (N − p − 2)/(N − 1)', () => {
    expect(hartlapFactor(1200, 40)).toBeCloseTo(1158 / 1199, 15);
  });

  it('have covariance with divisor N − 1 and their mean', () => {
    // By hand: columns (1, 2, 3, 4, 5, 6, 9) less mean 30/7.
    const { covariance, mean } = covarianceFromMocks(
      matrix('1 0\n2 1\n3 0\n4 1\n5 0\n6 1\n9 0\n', 'mocks'),
      2,
    );
    expect(mean?.[0]).toBeCloseTo(30 / 7, 14);
    expect(covariance?.[0]).toBeCloseTo((172 - 900 / 7) / 6, 13);
    expect(covariance?.[1]).toBeCloseTo((12 - (30 * 3) / 7) / 6, 13);
  });

  it.each([1, 4, 7])('have the covariance of plain double sums, %d bins and more mocks than a block', (p) => {
    const n = 1100;
    const data = Float64Array.from({ length: n * p }, (_, k) => Math.sin(k * k) + (k % p));
    const lines = Int32Array.from({ length: n }, (_, row) => row + 1);
    const { covariance, mean } = covarianceFromMocks({ rows: n, columns: p, data, lines, findings: [] }, p);
    for (let i = 0; i < p; i += 1) {
      for (let j = 0; j < p; j += 1) {
        let sum = 0;
        for (let row = 0; row < n; row += 1) {
          sum += (data[row * p + i] - mean![i]) * (data[row * p + j] - mean![j]);
        }
        expect(covariance![i * p + j]).toBeCloseTo(sum / (n - 1), 13);
      }
    }
  });

  it('that are copies, or far from the others, are named by line', () => {
    const far = rows[9].split(',').with(4, '0.5').join(',');
    const { findings } = covarianceFromMocks(
      matrix(rows.with(20, rows[3]).with(9, far).join('\n'), 'mocks'),
      30,
    );
    expect(placesOf(findings, 'warning')).toEqual([
      ['duplicate-mocks', 21],
      ['outlying-mock', 10],
    ]);
  });

  it('with a column that counts them are refused with that remedy', () => {
    const counted = rows.map((row, i) => `${i},${row}`).join('\n');
    const [found] = covarianceFromMocks(matrix(counted, 'mocks'), 30).findings;
    expect([found.code, found.column]).toEqual(['mocks-size', 1]);
    expect(found.remedy).toContain('Leave out the first column');
  });

  it('with a bin that never varies are refused', () => {
    const still = rows.map((row) => row.split(',').with(7, '1').join(',')).join('\n');
    const { ok, checks } = preflight({ file: load('null.dat'), mocks: file(still) });
    expect(ok).toBe(false);
    expect(checks[0]).toMatchObject({ code: 'covariance-not-positive-definite', part: 'mocks', column: 8 });
  });
});

describe('cuts', () => {
  const kappa = Float64Array.from([0.15, 0.25, 0.35]);
  const bins: Measurement = {
    kappa,
    kappaLo: Float64Array.from([0.1, 0.2, 0.3]),
    kappaHi: Float64Array.from([0.2, 0.3, 0.4]),
    S: Float64Array.from([1, 2, 3]),
    sigma: null,
    order: Int32Array.from([2, 0, 1]),
  };
  const covariance = Float64Array.from([11, 12, 13, 12, 22, 23, 13, 23, 33]);

  it('keep a bin that lies inside, with its rows and columns of the covariance', () => {
    const cut = applyCuts(bins, covariance, { kappaMin: 0.2, kappaMax: 0.4 });
    expect(Array.from(cut.indices)).toEqual([1, 2]);
    expect(Array.from(cut.covariance)).toEqual([22, 23, 23, 33]);
    expect(Array.from(cut.measurement.S)).toEqual([2, 3]);
    expect(Array.from(cut.measurement.order)).toEqual([0, 1]);
  });

  it.each([
    [0.2 * (1 + 0.9e-9), 3 - 1],
    [0.2 * (1 + 1.2e-9), 1],
    [0.15, 2],
    [undefined, 3],
  ])('from %d keep %d of the bins', (kappaMin, count) => {
    expect(applyCuts(bins, covariance, { kappaMin }).indices).toHaveLength(count);
  });

  it('take κ where there are no edges', () => {
    const points = { ...bins, kappaLo: null, kappaHi: null };
    expect(Array.from(applyCuts(points, covariance, { kappaMin: 0.15, kappaMax: 0.25 }).indices)).toEqual([
      0, 1,
    ]);
  });

  it('that leave nothing are refused', () => {
    expect(errorOf(() => applyCuts(bins, covariance, { kappaMax: 0.15 })).code).toBe('cut-empty');
  });
});

describe('suspicious points', () => {
  const kappa = Float64Array.from({ length: 40 }, (_, i) => 0.003 * 1.12 ** i);
  const sigma = kappa.map(() => 0.01);
  const measure = (S: Float64Array): Measurement => ({
    kappa,
    kappaLo: null,
    kappaHi: null,
    S,
    sigma,
    order: Int32Array.from(kappa.keys()),
  });

  it('are found at either end and in the middle, and do not draw in their neighbours', () => {
    const S = kappa.map((value) => value ** 0.5);
    for (const index of [0, 17, 39]) {
      const found = findSuspiciousPoints(measure(S.with(index, S[index] + 0.2)), sigma);
      expect(found.map((point) => point.index)).toEqual([index]);
      expect(found[0].standardErrors).toBeGreaterThan(5);
    }
  });

  it('are not the crests of an oscillation that is fast against the bins', () => {
    const S = kappa.map((value) => Math.cos(20 * Math.log(value)));
    expect(findSuspiciousPoints(measure(S), sigma)).toEqual([]);
  });
});
