import { Matrix, QrDecomposition } from 'ml-matrix';
import {
  compileTemplate,
  powerColumn,
  squeezedCoefficient,
  type Axis,
  type FieldKind,
  type Vertex,
} from '@/lib/templates';
import { forwardSolve } from './cholesky';

/**
 * How far a squeezed template holds on given bins. To noise-free data of the exact shape of one field (all three permutations,
 * μ or ν known) the template's own columns are fitted with a free amplitude, complex for a heavy field, beside powers of κ:
 *
 *   bias = |C_fit / C − 1|.
 *
 * It is what the smooth part that the powers don't take up, and the corrections of order κ², leave in the amplitude. By the
 * highest κ that is kept, because each cut is its own fit. Method: reference formulas of ours, practical fit of the leading
 * template; checked against the values tabulated there.
 */
export interface AccuracyAsked {
  kind: FieldKind;
  /** μ of a heavy field (0 < μ ≤ 20), ν of a light one (0 < ν < 3/2). */
  mass: number;
  vertex: Vertex;
  /** Bins or points in ascending κ, all below 2. */
  axis: Axis;
  /** Sets of powers of κ that are fitted beside the field, one after the other. */
  powers: readonly (readonly number[])[];
  /** How the bins are weighed: lower Cholesky factor of the covariance (p × p, row-major), or errors (p). */
  metric: { factor: Float64Array } | { sigma: Float64Array };
  /** Numbers of bins, counted from the lowest κ, for which the bias is wanted; ascending. */
  counts: readonly number[];
}

/** Columns of the amplitude that is fitted, and its true coefficients for the exact shape. */
function amplitudeColumns({ kind, mass, vertex, axis }: AccuracyAsked) {
  const binWeight = axis.kind === 'bins' ? axis.weightPower : 0;
  const shared = { background: [], ...(axis.kind === 'bins' ? { binWeight } : {}) };
  if (kind === 'light') {
    const light = compileTemplate('light', { fields: 1, vertex, ...shared }, axis);
    return { columns: [light.predict([mass, 1])], truth: [1], shared };
  }
  const free = compileTemplate('free-phase', { fields: 1, ...shared }, axis);
  const columns = [new Float64Array(free.length), new Float64Array(free.length)];
  free.blocks[0].fill(mass, columns);
  // S = κ^½ Re[C κ^{iμ}] = κ^½ (Re C cos(μ ln κ) − Im C sin(μ ln κ)).
  const { re, im } = squeezedCoefficient(mass, vertex);
  return { columns, truth: [re, -im], shared };
}

/**
 * The bias for every set of powers and every count asked for, a share of the amplitude (dimensionless); NaN where there are
 * fewer bins than fitted numbers or columns that can't be told apart. Throws TemplateError where mass or axis are out of range.
 */
export function amplitudeBias(asked: AccuracyAsked): Float64Array[] {
  const { kind, mass, vertex, axis, powers, counts } = asked;
  const { columns, truth, shared } = amplitudeColumns(asked);
  const exact = compileTemplate('locked-exact', { fields: [kind], vertex, ...shared }, axis);
  const weigh = weighing(asked.metric);
  const data = weigh(exact.predict([mass, 1]));
  const field = columns.map(weigh);
  const size = Math.hypot(...truth);
  return powers.map((set) => {
    const design = [...field, ...set.map((power) => weigh(powerColumn(axis, power)))];
    return Float64Array.from(counts, (count) => {
      const fitted = leastSquares(design, data, count);
      return fitted ? Math.hypot(...truth.map((value, j) => fitted[j] - value)) / size : NaN;
    });
  });
}

function weighing(metric: AccuracyAsked['metric']): (column: Float64Array) => Float64Array {
  if ('sigma' in metric) return (column) => column.map((value, i) => value / metric.sigma[i]);
  return (column) => {
    const out = Float64Array.from(column);
    forwardSolve(metric.factor, out.length, out);
    return out;
  };
}

/**
 * Coefficients of the columns' first `count` rows, by QR; null where they aren't determined. Columns of very different size
 * (κ⁴ beside κ^½) are scaled to one, or their smallness would pass for dependence.
 */
function leastSquares(
  columns: readonly Float64Array[],
  data: Float64Array,
  count: number,
): Float64Array | null {
  if (count < columns.length) return null;
  const scales = columns.map((column) => Math.hypot(...column.subarray(0, count)) || 1);
  const design = new Matrix(count, columns.length);
  columns.forEach((column, j) => {
    for (let i = 0; i < count; i += 1) design.set(i, j, column[i] / scales[j]);
  });
  const qr = new QrDecomposition(design);
  if (!qr.isFullRank()) return null;
  const solved = qr.solve(Matrix.columnVector(data.subarray(0, count)));
  return Float64Array.from(scales, (scale, j) => solved.get(j, 0) / scale);
}

/**
 * The highest κ up to which the bias stays within `share`: the last of `kappa` before the first excess. Cuts that span less
 * than one e-fold of κ are passed over, in which nothing can be told apart. NaN where the first cut beyond that exceeds it.
 *
 * @param bias of every cut
 * @param kappa upper end of every cut, ascending
 * @param lowest lower end of the lowest bin
 */
export function reachOf(
  bias: ArrayLike<number>,
  kappa: ArrayLike<number>,
  lowest: number,
  share: number,
): number {
  let reach = NaN;
  for (let i = 0; i < bias.length; i += 1) {
    if (!(kappa[i] > Math.E * lowest) || Number.isNaN(bias[i])) continue;
    if (bias[i] > share) return reach;
    reach = kappa[i];
  }
  return reach;
}
