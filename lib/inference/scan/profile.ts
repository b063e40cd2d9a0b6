import type { Likelihood } from '../likelihoods';
import type { Moments } from './moments';

/** A pivot below this part of its column's own square is a column that the others make up already. */
const DEPENDENT = 1e-11;

/**
 * Minimises Σ_b w_b χ²_b over flat coefficients: solves Σ w_b X_bᵀX_b c = Σ w_b X_bᵀd_b. Columns that others make up get 0.
 * Writes the coefficients; returns the minimum.
 */
function leastSquares(moments: readonly Moments[], weights: ArrayLike<number>, out: Float64Array): number {
  const n = out.length;
  const a = new Float64Array(n * n);
  const y = new Float64Array(n);
  let square = 0;
  for (let b = 0; b < moments.length; b += 1) {
    const w = weights[b];
    square += w * moments[b].square;
    for (let i = 0; i < n; i += 1) {
      y[i] += w * moments[b].linear[i];
      for (let j = 0; j <= i; j += 1) a[i * n + j] += w * moments[b].gram[i * n + j];
    }
  }
  const kept = new Uint8Array(n);
  for (let i = 0; i < n; i += 1) {
    const own = a[i * n + i];
    for (let j = 0; j <= i; j += 1) {
      if (j < i && kept[j] === 0) continue;
      let sum = a[i * n + j];
      for (let k = 0; k < j; k += 1) if (kept[k] === 1) sum -= a[i * n + k] * a[j * n + k];
      if (j < i) a[i * n + j] = sum / a[j * n + j];
      else if (sum > DEPENDENT * own && own > 0) {
        kept[i] = 1;
        a[i * n + i] = Math.sqrt(sum);
      }
    }
    if (kept[i] === 0) continue;
    let right = y[i];
    for (let k = 0; k < i; k += 1) if (kept[k] === 1) right -= a[i * n + k] * y[k];
    y[i] = right / a[i * n + i];
    square -= y[i] * y[i];
  }
  for (let i = n - 1; i >= 0; i -= 1) {
    out[i] = 0;
    if (kept[i] === 0) continue;
    let sum = y[i];
    for (let k = i + 1; k < n; k += 1) if (kept[k] === 1) sum -= a[k * n + i] * out[k];
    out[i] = sum / a[i * n + i];
  }
  return square;
}

/** χ² of one block at these coefficients. */
function chiSquareAt({ gram, linear, square }: Moments, c: Float64Array): number {
  const n = c.length;
  let sum = square;
  for (let i = 0; i < n; i += 1) {
    let row = -2 * linear[i];
    for (let j = 0; j < n; j += 1) row += gram[i * n + j] * c[j];
    sum += c[i] * row;
  }
  return Math.max(0, sum);
}

export interface BestFit {
  /** ln L at the maximum over the coefficients, flat. */
  logLikelihood: number;
  /** χ² of each block with its covariance as given. */
  chiSquare: number[];
  coefficients: Float64Array;
}

/**
 * The highest likelihood over flat coefficients. One block: least squares, whatever the likelihood, since each falls with χ².
 * Several with a t among them: least squares with the weights w_b = m_b/(s_b + χ²_b) until they settle (the EM of the
 * scale mixture, which never lowers the likelihood).
 */
export function bestFit(moments: readonly Moments[], likelihoods: readonly Likelihood[]): BestFit {
  const coefficients = new Float64Array(moments[0].size);
  const logLikelihoodOf = (chiSquare: readonly number[]): number =>
    likelihoods.reduce((sum, likelihood, b) => sum + likelihood.logDensity(chiSquare[b]), 0);
  if (moments.length === 1) {
    const chiSquare = [Math.max(0, leastSquares(moments, [1], coefficients))];
    return { logLikelihood: logLikelihoodOf(chiSquare), chiSquare, coefficients };
  }
  let weights = likelihoods.map(({ exponent, spread, scale }) =>
    exponent !== null && spread !== null ? exponent / spread : scale,
  );
  let chiSquare: number[] = [];
  let before = -Infinity;
  for (let round = 0; round < 200; round += 1) {
    leastSquares(moments, weights, coefficients);
    chiSquare = moments.map((block) => chiSquareAt(block, coefficients));
    const now = logLikelihoodOf(chiSquare);
    if (!(now > before + 1e-13 * Math.abs(now))) break;
    before = now;
    weights = likelihoods.map(({ exponent, spread, scale }, b) =>
      exponent !== null && spread !== null ? exponent / (spread + chiSquare[b]) : scale,
    );
  }
  return { logLikelihood: logLikelihoodOf(chiSquare), chiSquare, coefficients };
}
