import type { CollapsedModel, MassFit } from './scan-model';
import { maximise } from './maximise';

/** Points of a scan between two frequencies that can just be told apart. */
export const POINTS_PER_RESOLUTION = 20;
/** Least points of a scan. */
const LEAST = 65;
/** How many of the grid's highest maxima are refined: the highest of them on the grid need not be the highest. */
const CANDIDATES = 6;

/**
 * A regular grid on [lo, hi] finer than the resolution: twenty points to 2π/reach, where `reach` is how fast the columns turn with
 * the frequency (ln κ_max/κ_min; the largest |ln κ/4| where the phase is locked).
 */
export function scanGrid(lo: number, hi: number, reach: number): Float64Array {
  const count = Math.max(LEAST, Math.ceil(((hi - lo) * POINTS_PER_RESOLUTION * reach) / (2 * Math.PI)) + 1);
  return Float64Array.from({ length: count }, (_, i) =>
    i === count - 1 ? hi : lo + ((hi - lo) * i) / (count - 1),
  );
}

export interface LineScan {
  mu: Float64Array;
  /** 2 [ln L_max(μ) − ln L_max(background)], linear terms flat. */
  deltaChi2: Float64Array;
  /** ln p(d | μ) with the linear priors; NaN where there is none. */
  logEvidence: Float64Array;
  best: { mu: number; deltaChi2: number; fit: MassFit };
}

/** Scans one field over `grid` and refines the best frequency to 1e-8 by Brent's method. `onPoint` hears of every part done. */
export function scanLine(
  model: CollapsedModel,
  grid: Float64Array,
  onPart: (part: number) => void = () => undefined,
): LineScan {
  const background = model.background().logLikelihood;
  const rise = (mass: number): number => 2 * (model.fit([mass]).logLikelihood - background);
  const deltaChi2 = new Float64Array(grid.length);
  const logEvidence = new Float64Array(grid.length);
  for (let i = 0; i < grid.length; i += 1) {
    const columns = [model.columns(0, grid[i])];
    deltaChi2[i] = 2 * (model.fit([grid[i]], columns).logLikelihood - background);
    const sharpness = Math.sqrt(Math.max(0, deltaChi2[i]));
    logEvidence[i] = model.logEvidence([grid[i]], sharpness, columns) ?? NaN;
    if (i % 16 === 0) onPart(i / grid.length);
  }
  const tops = localMaxima(deltaChi2).slice(0, CANDIDATES);
  let best = { at: grid[tops[0]], value: deltaChi2[tops[0]] };
  for (const i of tops) {
    const lo = grid[Math.max(0, i - 1)];
    const hi = grid[Math.min(grid.length - 1, i + 1)];
    const found = maximise(rise, lo, hi, 1e-8);
    if (found.value > best.value) best = found;
  }
  return {
    mu: grid,
    deltaChi2,
    logEvidence,
    best: { mu: best.at, deltaChi2: best.value, fit: model.fit([best.at]) },
  };
}

/** Indices of values that no neighbour exceeds, highest first. */
export function localMaxima(values: ArrayLike<number>): number[] {
  const found: number[] = [];
  for (let i = 0; i < values.length; i += 1) {
    const left = i === 0 ? -Infinity : values[i - 1];
    const right = i === values.length - 1 ? -Infinity : values[i + 1];
    if (values[i] >= left && values[i] > right) found.push(i);
  }
  if (found.length === 0) found.push(0);
  return found.sort((a, b) => values[b] - values[a]);
}
