import type { Axis, CompiledTemplate } from '@/lib/templates';
import { predictiveBand, type PredictiveBand } from './prior-predictive';
import type { Inference } from './types';

/**
 * The band of the predictions of posterior draws: `draws` holds sampled parameter vectors one after the other, `width` numbers
 * each of which the parameters begin at `offset`. `template` may be compiled on a finer axis than the fit's. At most `most`
 * draws are used, evenly spaced over all of them.
 */
export function posteriorBand(
  inference: Pick<Inference, 'expand'>,
  template: CompiledTemplate,
  draws: Float64Array,
  { width, offset, most = 400 }: { width: number; offset: number; most?: number },
): PredictiveBand {
  const count = Math.floor(draws.length / width);
  const used = Math.min(most, count);
  const predictions = Array.from({ length: used }, (_, k) => {
    const start = Math.floor(((k + 0.5) * count) / used) * width;
    return template.predict(inference.expand(draws.subarray(start + offset, start + width)));
  });
  return predictiveBand(predictions);
}

/**
 * The draw of the highest likelihood, as a full parameter vector with its χ² (covariance as given). `draws` as in
 * `DrawBlock`: ln likelihood, ln prior, sampled parameters. It is the best of the draws, not a maximum.
 */
export function bestDraw(
  inference: Pick<Inference, 'expand' | 'chiSquare'>,
  draws: Float64Array,
  width: number,
): { parameters: Float64Array; logLikelihood: number; chiSquare: number } {
  let best = 0;
  for (let at = width; at + width <= draws.length; at += width) if (draws[at] > draws[best]) best = at;
  const x = draws.slice(best + 2, best + width);
  return { parameters: inference.expand(x), logLikelihood: draws[best], chiSquare: inference.chiSquare(x) };
}

/** What an axis can tell of masses, from its reach in ln κ alone. */
export interface CoverageFacts {
  /** ln(κ_max/κ_min). */
  length: number;
  /** Frequencies closer than this are not told apart: 2π/length. */
  resolution: number;
  /** Widest step in ln κ between neighbours. */
  spacing: number;
  /** Frequencies above this have an alias below it: π/spacing. */
  nyquist: number;
}

/** Coverage of several measurements together: from the lowest to the highest κ, in the steps of the one with the finest. */
export function jointCoverage(axes: readonly Axis[]): CoverageFacts {
  if (axes.length === 1) return coverageFacts(axes[0]);
  const ends = axes.map((axis): [number, number] =>
    axis.kind === 'bins'
      ? [axis.lo[0], axis.hi[axis.hi.length - 1]]
      : [axis.kappa[0], axis.kappa[axis.kappa.length - 1]],
  );
  const length = Math.log(Math.max(...ends.map(([, high]) => high)) / Math.min(...ends.map(([low]) => low)));
  const spacing = Math.min(...axes.map((axis) => coverageFacts(axis).spacing));
  return { length, resolution: (2 * Math.PI) / length, spacing, nyquist: Math.PI / spacing };
}

/** Coverage of bins (their edges; spacing is the widest bin) or points. At least two values, ascending. */
export function coverageFacts(axis: Axis): CoverageFacts {
  const low = axis.kind === 'bins' ? axis.lo : axis.kappa;
  const high = axis.kind === 'bins' ? axis.hi : axis.kappa;
  const length = Math.log(high[high.length - 1] / low[0]);
  let spacing = 0;
  for (let i = 1; i < low.length; i += 1) spacing = Math.max(spacing, Math.log(low[i] / low[i - 1]));
  return { length, resolution: (2 * Math.PI) / length, spacing, nyquist: Math.PI / spacing };
}
