import type { Likelihood } from '../likelihoods';
import type { NullDraws } from './null-draws';
import { NullStatistics, peakOf, type TrialColumns } from './null-statistics';
import { PlaneStatistic } from './plane-statistic';
import type { CollapsedModel } from './scan-model';

/** What nulls say of a scan. Heights are Δχ² = 2 Δ ln L, in the order of the nulls. */
export interface NullHeights {
  heights: Float64Array;
  /** The same statistic of the data: the grid's largest, with a parabola through it. */
  observed: number;
  /** (k + 1)/(n + 1), k nulls at least as high. */
  globalP: number;
  /** Mean number of upcrossings of `level`; NaN where they weren't counted. */
  upcrossings: number;
  level: number;
}

/** Level of Δχ² at which upcrossings are counted: low, where they are many. */
export const UPCROSSING_LEVEL = 1;

/** How a fall of χ² becomes Δχ² = 2 Δ ln L, given the χ² with the background alone. */
export function riseOf(likelihood: Likelihood, gain: number, chiSquare: number): number {
  const { exponent, spread, scale } = likelihood;
  if (exponent === null || spread === null) return scale * gain;
  return exponent * Math.log((spread + chiSquare) / (spread + Math.max(0, chiSquare - gain)));
}

export const globalTail = (heights: ArrayLike<number>, observed: number): number => {
  let k = 0;
  for (let i = 0; i < heights.length; i += 1) if (heights[i] >= observed) k += 1;
  return (k + 1) / (heights.length + 1);
};

/**
 * The height above which global p = (k + 1)/(n + 1) is at most `p`: with k = ⌊p (n + 1)⌋ − 1, the height that k of the n nulls
 * exceed. Null where n nulls can't tell a p so small.
 */
export function nullThreshold(heights: ArrayLike<number>, p: number): number | null {
  // A product such as 0.05 × 20 isn't always 1 in binary.
  const k = Math.floor(p * (heights.length + 1) * (1 + 1e-12)) - 1;
  return k < 0 ? null : Float64Array.from(heights).sort()[heights.length - 1 - k];
}

/**
 * The columns that a scan of one field tries at every place, whitened, or null where they aren't linear or there is more than one
 * block.
 */
export function trialColumns(model: CollapsedModel, grid: Float64Array, field = 0): TrialColumns[] | null {
  const { blocks, coordinates } = model;
  if (blocks.length !== 1 || coordinates.freedom === null) return null;
  const p = blocks[0].data.length;
  return Array.from(grid, (mass) => {
    const [columns] = model.columns(field, mass);
    const [{ design }] = coordinates.profile([mass]);
    return Array.from({ length: design.count }, (_, j) => {
      const out = new Float64Array(p);
      for (let a = 0; a < design.raw; a += 1) {
        const factor = design.matrix[a * design.count + j];
        for (let i = 0; i < p; i += 1) out[i] += factor * columns[a * p + i];
      }
      return out;
    });
  });
}

const backgroundOf = (model: CollapsedModel): Float64Array[] =>
  model.blocks[0].fixed.map((column) => column ?? new Float64Array(model.blocks[0].data.length));

export interface NullSettings {
  count: number;
  draws: NullDraws;
  onPart?: (part: number) => void;
}

/** Nulls of a scan of one field. Throws TypeError where the draws are cut otherwise than the model. */
export function lineNulls(
  model: CollapsedModel,
  places: readonly TrialColumns[],
  { count, draws, onPart = () => undefined }: NullSettings,
): NullHeights {
  const [{ data, likelihood }] = model.blocks;
  const statistics = new NullStatistics(backgroundOf(model), places);
  const gains = new Float64Array(places.length);
  const height = (): number => riseOf(likelihood, peakOf(gains), statistics.chiSquare);
  statistics.load({ noise: data, metric: null });
  statistics.gains(gains);
  const observed = height();
  const heights = new Float64Array(count);
  let crossings = 0;
  for (let i = 0; i < count; i += 1) {
    statistics.load(draws.next());
    statistics.gains(gains);
    heights[i] = height();
    for (let k = 1; k < gains.length; k += 1) {
      if (gains[k] >= UPCROSSING_LEVEL && gains[k - 1] < UPCROSSING_LEVEL) crossings += 1;
    }
    if (i % 200 === 0) onPart(i / count);
  }
  return {
    heights,
    observed,
    globalP: globalTail(heights, observed),
    upcrossings: crossings / count,
    level: UPCROSSING_LEVEL,
  };
}

/** Nulls of the plane of two fields whose columns at one mass are `places`; `sameSign` for locked phases. */
export function planeNulls(
  model: CollapsedModel,
  places: readonly TrialColumns[],
  sameSign: boolean,
  { count, draws, onPart = () => undefined }: NullSettings,
): NullHeights {
  const [{ data, likelihood }] = model.blocks;
  const statistics = new NullStatistics(backgroundOf(model), places);
  statistics.load({ noise: data, metric: null });
  const known = new PlaneStatistic(statistics, sameSign, false);
  const observed = riseOf(likelihood, known.largest(), statistics.chiSquare);
  const heights = new Float64Array(count);
  let drawn: PlaneStatistic | null = null;
  for (let i = 0; i < count; i += 1) {
    const next = draws.next();
    statistics.load(next);
    if (next.metric) drawn ??= new PlaneStatistic(statistics, sameSign, true);
    heights[i] = riseOf(likelihood, (drawn ?? known).largest(), statistics.chiSquare);
    if (i % 50 === 0) onPart(i / count);
  }
  return { heights, observed, globalP: globalTail(heights, observed), upcrossings: NaN, level: NaN };
}
