import { describe, expect, it } from 'vitest';
import { extremeEigenvalues } from '@/lib/measurements/eigenvalues';

/** Reference values derived by us, in closed form. */
const matrix = (p: number, element: (i: number, j: number) => number): Float64Array =>
  Float64Array.from({ length: p * p }, (_, k) => element(Math.floor(k / p), k % p));

const expectExtremes = (found: ReturnType<typeof extremeEigenvalues>, smallest: number, largest: number) => {
  // The error of either is some p·2⁻⁵² of the larger.
  const allowed = 500 * Number.EPSILON * Math.max(Math.abs(smallest), Math.abs(largest));
  expect(Math.abs(found.smallest - smallest)).toBeLessThan(allowed);
  expect(Math.abs(found.largest - largest)).toBeLessThan(allowed);
};

describe('the smallest and the largest eigenvalue', () => {
  it.each([1, 2, 3, 40, 250])('of min(i, j) are 1/(4 sin²) at the ends, %d bins', (p) => {
    const at = (k: number) => 1 / (4 * Math.sin((Math.PI * (2 * k - 1)) / (2 * (2 * p + 1))) ** 2);
    expectExtremes(
      extremeEigenvalues(
        matrix(p, (i, j) => Math.min(i, j) + 1),
        p,
      ),
      at(p),
      at(1),
    );
  });

  it.each([0.3, 0.999, -0.02])('of equal correlations %d are 1 − ρ and 1 + (p − 1)ρ', (rho) => {
    const p = 40;
    const ends = [1 - rho, 1 + (p - 1) * rho].sort((a, b) => a - b);
    const found = extremeEigenvalues(
      matrix(p, (i, j) => (i === j ? 1 : rho)),
      p,
    );
    expectExtremes(found, ends[0], ends[1]);
  });

  it('of a diagonal matrix are its elements to the last bit, however far apart and in whatever order', () => {
    const diagonal = [3, 1e-290, 1e5, 7e-12];
    const found = extremeEigenvalues(
      matrix(4, (i, j) => (i === j ? diagonal[i] : 0)),
      4,
    );
    expect(found.largest).toBe(1e5);
    expect(found.smallest / 1e-290).toBeCloseTo(1, 14);
  });

  it.each([1e-200, 1e200])('scale with the matrix, by %d', (scale) => {
    const found = extremeEigenvalues(
      matrix(3, (i, j) => scale * (Math.min(i, j) + 1)),
      3,
    );
    // The cubic of min(i, j) has the roots 1/(4 sin²(π/14)), …: 5.0489… and 0.3079….
    expect(found.largest / scale).toBeCloseTo(5.048917339522305, 12);
    expect(found.smallest / scale).toBeCloseTo(0.3079785283699041, 12);
  });

  it('may be negative, and are both zero of nothing', () => {
    expectExtremes(extremeEigenvalues(Float64Array.from([0, 2, 2, 0]), 2), -2, 2);
    expectExtremes(
      extremeEigenvalues(
        matrix(5, () => 1),
        5,
      ),
      0,
      5,
    );
    expect(extremeEigenvalues(new Float64Array(9), 3)).toEqual({ smallest: 0, largest: 0 });
  });
});
