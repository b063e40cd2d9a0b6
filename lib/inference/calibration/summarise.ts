import { countCoverage, type IntervalCoverage } from './interval-coverage';
import { binomialBounds } from './rank-bands';
import { LOG_LIKELIHOOD } from './quantity-name';
import type { DatasetRanks } from './rank-dataset';
import { judgeRanks, type RankVerdict } from './verdict';

/** Intervals of ranks that are compared with the band, and bars of the histogram. */
export const rankIntervals = 20;

/** How often calibrated ranks may leave the bands of all quantities together. */
export const calibrationAlpha = 0.01;

/** What the ranks of all datasets come to. */
export interface CalibrationSummary {
  calibrated: boolean;
  datasets: number;
  draws: number;
  alpha: number;
  /** Counts of ranks below i (L + 1)/K between which each quantity keeps, i = 1 … K − 1. */
  band: { lower: number[]; upper: number[] };
  /** Counts of one bar of a histogram, for all bars of all quantities at once at α (Bonferroni). */
  bar: { lower: number; upper: number };
  /** The log-likelihood at the truth first, then the parameters. */
  quantities: (RankVerdict & { bars: number[] })[];
  coverage: IntervalCoverage[];
  /** Draws made after warm-up for the L that are kept, and the least effective size (bulk) of any quantity in them. */
  made: { mean: number; most: number };
  leastEss: number;
  /** Numbers, from 0, of datasets whose chain didn't reach an effective size of 2 L; they are counted like the others. */
  unmixed: number[];
}

/**
 * Judges the ranks of datasets 0 … N − 1, in that order, and counts the coverage of their intervals.
 *
 * @param found of `rankDataset`, the same quantities in each
 * @param L draws behind a rank; L + 1 a multiple of `rankIntervals`
 */
export function summariseCalibration(found: readonly DatasetRanks[], L: number): CalibrationSummary {
  const names = Object.keys(found[0].ranks);
  const column = (pick: (each: DatasetRanks) => Record<string, number>, of: readonly string[]) =>
    Object.fromEntries(of.map((name) => [name, found.map((each) => pick(each)[name])]));
  const ranks = column((each) => each.ranks, names);
  const verdict = judgeRanks(ranks, L, calibrationAlpha, rankIntervals);
  const perBar = calibrationAlpha / (names.length * rankIntervals);
  const [lower, upper] = binomialBounds(found.length, 1 / rankIntervals, perBar);
  return {
    calibrated: verdict.calibrated,
    datasets: found.length,
    draws: L,
    alpha: calibrationAlpha,
    band: { lower: verdict.band.lower, upper: verdict.band.upper },
    bar: { lower, upper },
    quantities: verdict.quantities.map((each) => ({
      ...each,
      bars: [...each.counts, found.length].map((count, i) => count - (i > 0 ? each.counts[i - 1] : 0)),
    })),
    coverage: countCoverage(
      column(
        (each) => each.covered,
        names.filter((name) => name !== LOG_LIKELIHOOD),
      ),
      L,
      calibrationAlpha,
    ),
    made: {
      mean: found.reduce((sum, { made }) => sum + made, 0) / found.length,
      most: Math.max(...found.map(({ made }) => made)),
    },
    leastEss: Math.min(...found.map(({ ess }) => ess)),
    unmixed: found.flatMap(({ reached }, k) => (reached ? [] : [k])),
  };
}
