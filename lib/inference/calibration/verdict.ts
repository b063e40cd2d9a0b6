import { rankBand, rankCounts, type RankBand } from './rank-bands';

/** How ranks leave the band: what the posterior is, next to the truth. */
export const rankShapes = ['too low', 'too high', 'too narrow', 'too wide'] as const;
export type RankShape = (typeof rankShapes)[number];

/** One quantity's ranks, judged. */
export interface RankVerdict {
  name: string;
  /** Ranks below i (L + 1)/K, i = 1 … K − 1. */
  counts: number[];
  /** Places i at which the count is out of the band. */
  outside: number;
  /** Mean of (r + ½)/(L + 1) minus ½ in its standard error, √((1 − 1/(L + 1)²)/(12 N)). */
  locationZ: number;
  /** χ² of the K bins against N/K each, K − 1 degrees of freedom. */
  chiSquare: number;
  /** Null within the band. */
  shape: RankShape | null;
}

export interface CalibrationVerdict {
  /** Band of each quantity, at α divided by their number. */
  band: RankBand;
  quantities: RankVerdict[];
  calibrated: boolean;
}

/**
 * Judges the ranks of several quantities together: calibrated ones are all within their bands with probability
 * 1 − α or more (Bonferroni over the quantities).
 *
 * @param ranks of each quantity by name, N each, whole numbers from 0 to L
 * @param L posterior draws behind a rank; L + 1 must be a multiple of `intervals`
 */
export function judgeRanks(
  ranks: Readonly<Record<string, readonly number[]>>,
  L: number,
  alpha = 0.01,
  intervals = 20,
): CalibrationVerdict {
  if ((L + 1) % intervals !== 0) {
    throw new RangeError(`${L} draws give ${L + 1} ranks, which ${intervals} intervals don’t divide`);
  }
  const names = Object.keys(ranks);
  const N = ranks[names[0]].length;
  const band = rankBand(N, intervals, alpha / names.length);
  const quantities = names.map((name) => judge(name, ranks[name], L, band));
  return { band, quantities, calibrated: quantities.every(({ outside }) => outside === 0) };
}

function judge(name: string, ranks: readonly number[], L: number, band: RankBand): RankVerdict {
  const N = ranks.length;
  const K = band.lower.length + 1;
  const counts = rankCounts(ranks, L, K);
  const outside = counts.filter((count, i) => count < band.lower[i] || count > band.upper[i]).length;
  const mean = ranks.reduce((sum, r) => sum + (r + 0.5) / (L + 1), 0) / N;
  const square = ranks.reduce((sum, r) => sum + ((r + 0.5) / (L + 1) - 0.5) ** 2, 0) / N;
  const locationZ = (mean - 0.5) / Math.sqrt((1 - 1 / (L + 1) ** 2) / (12 * N));
  // The square of a uniform number's distance from ½ has mean 1/12 and variance 1/180.
  const spreadZ = (square - 1 / 12) / Math.sqrt(1 / (180 * N));
  const all = [0, ...counts, N];
  const chiSquare = all.slice(1).reduce((sum, c, i) => sum + (c - all[i] - N / K) ** 2 / (N / K), 0);
  const slope: RankShape = locationZ > 0 ? 'too low' : 'too high';
  const bend: RankShape = spreadZ > 0 ? 'too narrow' : 'too wide';
  const shape = outside === 0 ? null : Math.abs(locationZ) > Math.abs(spreadZ) ? slope : bend;
  return { name, counts, outside, locationZ, chiSquare, shape };
}
