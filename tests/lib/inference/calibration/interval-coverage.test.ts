import { describe, expect, it } from 'vitest';
import {
  binomialBounds,
  countCoverage,
  coverageLevels,
  coveredLevels,
  expectedCoverage,
} from '@/lib/inference/calibration';
import { createRng } from '@/lib/sampler';

/** P(X ≤ k) of Binomial(N, p) by the recursion of its terms. */
function cumulative(N: number, p: number, k: number): number {
  let term = (1 - p) ** N;
  let sum = term;
  for (let j = 1; j <= k; j += 1) {
    term *= ((N - j + 1) / j) * (p / (1 - p));
    sum += term;
  }
  return k < 0 ? 0 : sum;
}

describe('bounds of a count', () => {
  it.each([
    [100, 0.5, 0.01],
    [200, 0.05, 1e-4],
    [50, 0.931, 0.01],
  ])('of %d trials of %d are its quantiles at %d', (N, p, gamma) => {
    const [lower, upper] = binomialBounds(N, p, gamma);
    expect(cumulative(N, p, lower - 1)).toBeLessThan(gamma / 2);
    expect(cumulative(N, p, lower)).toBeGreaterThanOrEqual(gamma / 2);
    expect(cumulative(N, p, upper)).toBeGreaterThanOrEqual(1 - gamma / 2 - 1e-12);
    expect(cumulative(N, p, upper - 1)).toBeLessThan(1 - gamma / 2);
  });

  it('refuse what has none', () => {
    expect(() => binomialBounds(0, 0.5, 0.01)).toThrow(RangeError);
    expect(() => binomialBounds(10, 1, 0.01)).toThrow(RangeError);
  });
});

describe('central intervals of few draws', () => {
  it('hold a truth as often as p (L − 1)/(L + 1) says, and not as often as p', () => {
    // The ends of 99 draws' intervals are drawn too: 0.931 in place of 0.95.
    expect(expectedCoverage(0.95, 99)).toBeCloseTo(0.931, 6);
    const L = 99;
    const N = 6_000;
    const rng = createRng('coverage');
    const x = Array.from({ length: N }, () =>
      coveredLevels(
        Float64Array.from({ length: L }, () => rng.normal()),
        rng.normal(),
      ),
    );
    const rows = countCoverage({ x }, L, 0.01);
    for (const { held, lower, upper } of rows) {
      expect(held).toBeGreaterThanOrEqual(lower);
      expect(held).toBeLessThanOrEqual(upper);
    }
    const [low] = binomialBounds(N, 0.95, 0.01);
    expect(rows[3].held).toBeLessThan(low);
  });

  it('are nested, so that the number that hold the truth says which do', () => {
    const draws = Float64Array.from({ length: 101 }, (_, i) => i);
    // Ends of the interval of 50 % are 25 and 75, of 68 % 16 and 84, of 90 % 5 and 95, of 95 % 2.5 and 97.5.
    expect([50, 25, 20, 10, 3, 1, 0].map((truth) => coveredLevels(draws, truth))).toEqual([
      4, 4, 3, 2, 1, 0, 0,
    ]);
    const rows = countCoverage({ x: [4, 3, 2, 1, 0] }, 99, 0.01);
    expect(rows.map(({ held }) => held)).toEqual([1, 2, 3, 4]);
    expect(rows.map(({ level }) => level)).toEqual([...coverageLevels]);
  });
});
