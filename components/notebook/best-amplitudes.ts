import { backwardSolve, choleskyInto, forwardSolve } from '@/lib/inference/cholesky';
import type { ParameterDeclaration, Prior } from '@/lib/templates';
import type { Prediction } from './prediction';
import { priorEnds } from './prior-values';

/** Parameters in which a prediction is linear while the others stand still. */
const linear = new Set(['quadrature', 'amplitude', 'coupling', 'background', 'column']);

/** Weight of a normal prior about its mean; 0 for what has no preferred value. */
function preference(prior: Prior): { precision: number; mean: number } {
  switch (prior.kind) {
    case 'normal':
    case 'truncated-normal':
      return { precision: prior.sd ** -2, mean: prior.mean };
    case 'half-normal':
      return { precision: prior.sd ** -2, mean: 0 };
    default:
      return { precision: 0, mean: 0 };
  }
}

/** Divides by the covariance's factor, or by the errors where there is none. */
function whiten({ factor, sigma }: Prediction['data'], vector: Float64Array): Float64Array {
  const out = Float64Array.from(vector);
  if (factor) forwardSolve(factor, out.length, out);
  else out.forEach((value, i) => (out[i] = value / sigma[i]));
  return out;
}

/**
 * The amplitudes (couplings, background coefficients) that are most probable while masses, angles and phases stay
 * as they are: linear least squares with the covariance and the normal priors, then kept inside the priors' ends. Returns x
 * itself where nothing linear is free.
 */
export function withBestAmplitudes(
  { onData, data }: Prediction,
  parameters: readonly ParameterDeclaration[],
  priors: Readonly<Record<string, Prior>>,
  x: ArrayLike<number>,
): Float64Array {
  const result = Float64Array.from(x);
  const priorOf = (i: number) => priors[parameters[i].name] ?? parameters[i].defaultPrior;
  const free = parameters.flatMap(({ role }, i) =>
    linear.has(role) && priorOf(i).kind !== 'fixed' ? [i] : [],
  );
  const n = free.length;
  if (n === 0 || !data.S.every(Number.isFinite)) return result;

  for (const i of free) result[i] = 0;
  const base = onData.predict(result);
  const columns = free.map((i) => {
    result[i] = 1;
    const column = onData.predict(result).map((value, k) => value - base[k]);
    result[i] = 0;
    return whiten(data, column);
  });
  const target = whiten(
    data,
    data.S.map((value, k) => value - base[k]),
  );
  const dot = (a: Float64Array, b: Float64Array) => a.reduce((sum, value, k) => sum + value * b[k], 0);
  const matrix = new Float64Array(n * n);
  const right = new Float64Array(n);
  free.forEach((i, a) => {
    const { precision, mean } = preference(priorOf(i));
    free.forEach((_, b) => (matrix[a * n + b] = dot(columns[a], columns[b])));
    matrix[a * n + a] = matrix[a * n + a] * (1 + 1e-12) + precision;
    right[a] = dot(columns[a], target) + precision * mean;
  });
  const factor = new Float64Array(n * n);
  if (choleskyInto(matrix, n, factor) >= 0) return Float64Array.from(x);
  forwardSolve(factor, n, right);
  backwardSolve(factor, n, right);
  free.forEach((i, a) => {
    const [lo, hi] = priorEnds(priorOf(i), parameters[i]);
    result[i] = Math.min(hi, Math.max(lo, right[a]));
  });
  return result;
}
