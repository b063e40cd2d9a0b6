import { describe, expect, it } from 'vitest';
import { covarianceFromMocks, parseMatrix } from '@/lib/measurements';
import { mockDistances } from '@/lib/measurements/mock-distances';
import { createRng } from '@/lib/sampler';
import { file } from './measurement-files';

/** Mocks of p bins that share a long mode, row by row. */
function draw(n: number, p: number, seed: string): number[][] {
  const rng = createRng(seed);
  return Array.from({ length: n }, () => {
    const shared = rng.normal();
    return Array.from({ length: p }, (_, j) => 2 + (j + 1) * rng.normal() + shared);
  });
}

const matrixOf = (rows: number[][]) =>
  parseMatrix(file(rows.map((row) => row.join(' ')).join('\n')).bytes, 'm', { part: 'mocks' });

const meanOf = (rows: number[][]) =>
  rows[0].map((_, j) => rows.reduce((sum, row) => sum + row[j], 0) / rows.length);

function distancesOf(rows: number[][]) {
  const mean = meanOf(rows);
  const columns = mean.map((m, j) => Float64Array.from(rows, (row) => row[j] - m));
  return mockDistances(columns, covarianceFromMocks(matrixOf(rows), mean.length).covariance!)!;
}

/** x of A x = b by elimination, the plain way. */
function solve(A: number[][], b: number[]): number[] {
  const M = A.map((row, i) => [...row, b[i]]);
  M.forEach((_, i) => {
    M.forEach((row, k) => {
      if (k === i) return;
      const factor = row[i] / M[i][i];
      M[i].forEach((value, j) => (row[j] -= factor * value));
    });
  });
  return M.map((row, i) => row[row.length - 1] / row[i]);
}

describe('distances of mocks', () => {
  it('are those to the mean of the others by their covariance, each left out in turn', () => {
    const rows = draw(14, 3, 'left out');
    distancesOf(rows).forEach(({ squared }, mock) => {
      const others = rows.filter((_, i) => i !== mock);
      const mean = meanOf(others);
      const S = mean.map((a, i) =>
        mean.map(
          (b, j) => others.reduce((sum, row) => sum + (row[i] - a) * (row[j] - b), 0) / (others.length - 1),
        ),
      );
      const off = rows[mock].map((value, j) => value - mean[j]);
      const direct = solve(S, off).reduce((sum, value, j) => sum + value * off[j], 0);
      expect(squared / ((13 / 14) * direct)).toBeCloseTo(1, 10);
    });
  });

  it('have uniform probabilities for normal mocks', () => {
    const below = Array.from({ length: 60 }, (_, k) => distancesOf(draw(40, 6, `uniform ${k}`))).flat();
    // 2400 mocks, correlated within a set: binomial errors of 0.0061 and 0.0102, four of them, a little less for the correlation.
    const share = (limit: number) =>
      below.filter(({ probability }) => probability < limit).length / below.length;
    expect(Math.abs(share(0.1) - 0.1)).toBeLessThan(0.025);
    expect(Math.abs(share(0.5) - 0.5)).toBeLessThan(0.041);
  });

  it('name a mock that no single bin gives away, by line and statistic', () => {
    const rows = draw(200, 6, 'against the mode');
    // Two standard deviations in each bin, against the mode that they share.
    const odd = rows[30].map((_, j) => 2 + (j % 2 === 0 ? 1 : -1) * 3.2 * (j + 1));
    const { findings } = covarianceFromMocks(matrixOf(rows.with(30, odd)), 6);
    const [found, ...others] = findings.filter(({ code }) => code === 'outlying-mock');
    expect(others).toEqual([]);
    expect(found).toMatchObject({ level: 'warning', line: 31 });
    expect(found.message).toMatch(/Mock 31 .*Mahalanobis distance.*Hotelling/);
    const alike = covarianceFromMocks(matrixOf(rows), 6).findings.map(({ code }) => code);
    expect(alike).toEqual(['mocks-ok', 'mocks-alike']);
  });
});
