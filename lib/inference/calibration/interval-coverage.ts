import { binomialBounds } from './rank-bands';

/** Probabilities of the central intervals whose coverage is counted, ascending: each lies within the next. */
export const coverageLevels = [0.5, 0.68, 0.9, 0.95] as const;

/** Quantile of type 7 (Hyndman and Fan 1996) of ascending values at p. */
function quantile(sorted: Float64Array, p: number): number {
  const at = (sorted.length - 1) * p;
  const below = Math.floor(at);
  const next = sorted[Math.min(below + 1, sorted.length - 1)];
  return sorted[below] + (at - below) * (next - sorted[below]);
}

/** How many of the central intervals of the draws hold the truth: 0 for none, 4 for all. */
export function coveredLevels(draws: Float64Array, truth: number): number {
  const sorted = draws.slice().sort();
  return coverageLevels.filter(
    (p) => quantile(sorted, (1 - p) / 2) <= truth && truth <= quantile(sorted, (1 + p) / 2),
  ).length;
}

/**
 * How often the central interval of probability p, from quantiles of type 7 of L independent draws, holds the truth when
 * all is well: p (L − 1)/(L + 1), which for 99 draws is 0.931 at p = 0.95. The draws and the truth part the probability
 * into L + 1 gaps of the same mean, and the quantiles lie p (L − 1) gaps apart; linear within a gap. It is p itself only
 * in the limit of many draws.
 */
export const expectedCoverage = (p: number, L: number): number => (p * (L - 1)) / (L + 1);

/** Coverage of one interval of one parameter over N datasets. */
export interface IntervalCoverage {
  name: string;
  /** The interval's probability. */
  level: number;
  /** Datasets in which it held the truth. */
  held: number;
  /** Share expected of L draws when all is well. */
  expected: number;
  /** Counts between which it then lies, at the family-wise α. */
  lower: number;
  upper: number;
}

/**
 * Counts of intervals that held the truth against Binomial(N, p (L − 1)/(L + 1)), all rows together at α (Bonferroni).
 *
 * @param covered `coveredLevels` of each parameter by name, N each
 * @param L draws behind each interval
 */
export function countCoverage(
  covered: Readonly<Record<string, readonly number[]>>,
  L: number,
  alpha: number,
): IntervalCoverage[] {
  const names = Object.keys(covered);
  const gamma = alpha / (names.length * coverageLevels.length);
  return names.flatMap((name) =>
    coverageLevels.map((level, i) => {
      const expected = expectedCoverage(level, L);
      const [lower, upper] = binomialBounds(covered[name].length, expected, gamma);
      // The widest interval holds the truth most often: the count of levels that hold it is from the wide end.
      const held = covered[name].filter((levels) => levels >= coverageLevels.length - i).length;
      return { name, level, held, expected, lower, upper };
    }),
  );
}
