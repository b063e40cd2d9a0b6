import { climb } from './maximise';
import type { CollapsedModel, MassFit } from './scan-model';

/** Most places of an axis: their pairs are what costs. */
const MOST = 96;
const LEAST = 24;
/** Points between two frequencies that can just be told apart. */
const POINTS_PER_RESOLUTION = 10;
/** Highest local maxima that are climbed. */
const CANDIDATES = 8;

/** One axis of the plane of two frequencies, both of them on [lo, hi]. */
export function planeGrid(lo: number, hi: number, reach: number): Float64Array {
  const wanted = Math.ceil(((hi - lo) * POINTS_PER_RESOLUTION * reach) / (2 * Math.PI)) + 1;
  const count = Math.min(MOST, Math.max(LEAST, wanted));
  return Float64Array.from({ length: count }, (_, i) =>
    i === count - 1 ? hi : lo + ((hi - lo) * i) / (count - 1),
  );
}

export interface PlaneScan {
  mu: Float64Array;
  /** Row-major (μ_1, μ_2), NaN unless μ_1 < μ_2. */
  deltaChi2: Float64Array;
  /** The same for ln p(d | μ_1, μ_2); null where phases are free and no quadrature is done. */
  logEvidence: Float64Array | null;
  best: { mu: [number, number]; deltaChi2: number; fit: MassFit };
}

/**
 * Scans two fields over all pairs μ_1 < μ_2 of `grid`, then climbs from the highest pairs (and from `starts`) to the best one.
 * `onPart` hears of every part done.
 */
export function scanPlane(
  model: CollapsedModel,
  grid: Float64Array,
  {
    starts = [],
    onPart = () => undefined,
    evidence = true,
  }: {
    starts?: readonly (readonly [number, number])[];
    onPart?: (part: number) => void;
    evidence?: boolean;
  } = {},
): PlaneScan {
  const n = grid.length;
  const background = model.background().logLikelihood;
  const first = Array.from(grid, (mass) => model.columns(0, mass));
  const second = Array.from(grid, (mass) => model.columns(1, mass));
  const deltaChi2 = new Float64Array(n * n).fill(NaN);
  const logEvidence = new Float64Array(n * n).fill(NaN);
  let quadrature = evidence;
  const pairs: [number, number, number][] = [];
  for (let i = 0; i < n; i += 1) {
    for (let j = i + 1; j < n; j += 1) {
      const masses = [grid[i], grid[j]];
      const columns = [first[i], second[j]];
      const rise = 2 * (model.fit(masses, columns).logLikelihood - background);
      deltaChi2[i * n + j] = rise;
      pairs.push([i, j, rise]);
      if (!quadrature) continue;
      const value = model.logEvidence(masses, Math.sqrt(Math.max(0, rise)), columns);
      if (value === null) quadrature = false;
      else logEvidence[i * n + j] = value;
    }
    onPart(1 - ((n - i) / n) ** 2);
  }
  const at = (i: number, j: number): number => (i < 0 || j >= n || i >= j ? -Infinity : deltaChi2[i * n + j]);
  const tops = pairs
    .filter(([i, j, rise]) => {
      for (const [di, dj] of [
        [-1, 0],
        [1, 0],
        [0, -1],
        [0, 1],
      ])
        if (at(i + di, j + dj) > rise) return false;
      return true;
    })
    .sort((a, b) => b[2] - a[2])
    .slice(0, CANDIDATES);
  const step = grid[1] - grid[0];
  const range = [grid[0], grid[n - 1]] as const;
  const rise = (x: number, y: number): number =>
    x > 0 && y > x ? 2 * (model.fit([x, y]).logLikelihood - background) : -Infinity;
  let best: { at: [number, number]; value: number } | null = null;
  for (const start of [...tops.map(([i, j]) => [grid[i], grid[j]] as const), ...starts]) {
    const found = climb(rise, start, [range, range], 0.02 * step);
    if (!best || found.value > best.value) best = found;
  }
  if (!best) throw new TypeError('a plane of fewer than two places');
  return {
    mu: grid,
    deltaChi2,
    logEvidence: quadrature ? logEvidence : null,
    best: { mu: best.at, deltaChi2: best.value, fit: model.fit(best.at) },
  };
}
