import { logGamma } from '@/lib/sampler';
import { choleskyInto, forwardSolve, logDeterminant } from '../cholesky';
import type { Likelihood } from '../likelihoods';
import { lnBoxExpectation } from './box-probability';
import type { LinearPrior } from './linear-prior';
import type { Moments } from './moments';

/** ln of what a node of the t's quadrature may fall below the largest before it is left out. */
const NEGLIGIBLE = 42;

/**
 * ln ∫ L(d | c) p(c) dc over the linear coefficients c, for blocks with shared coefficients.
 *
 * Normal likelihoods: Gaussian algebra with P = Σ_b w_b X_bᵀX_b + D⁻¹, and what the bounds of the priors leave of it
 * (`lnBoxExpectation`). Each t likelihood is a mixture of normals,
 *
 *     (1 + χ²/s)^(−m/2) = Γ(m/2)⁻¹ ∫ dt exp(m t/2 − eᵗ) exp(−eᵗ χ²/s),     s = N − 1,
 *
 * so that the same algebra holds at every t with w = 2 eᵗ/s; the integrals over t, one a block, are done by the trapezoidal
 * rule, which converges geometrically for an analytic integrand that falls off at both ends (steps of half a sd: error
 * below 1e-12). No normal approximation is made.
 */
export class CollapsedEvidence {
  private readonly precision: Float64Array;
  private readonly y: Float64Array;
  private readonly weights: Float64Array;
  private readonly logPrior: number;
  private readonly floors: Float64Array;

  constructor(
    private readonly likelihoods: readonly Likelihood[],
    private readonly priors: readonly LinearPrior[],
  ) {
    const n = priors.length;
    this.precision = new Float64Array(n * n);
    this.y = new Float64Array(n);
    this.weights = new Float64Array(likelihoods.length);
    this.logPrior = priors.reduce(
      (sum, { logConstant, precision, mean }) => sum + logConstant - 0.5 * precision * mean * mean,
      0.5 * n * Math.log(2 * Math.PI),
    );
    // A flat prior on a column that vanishes leaves P singular; far wider than the bounds is as good as flat.
    this.floors = Float64Array.from(priors, ({ precision, lo, hi }) =>
      precision > 0 ? 0 : 1e-12 / (hi - lo) ** 2,
    );
  }

  /** `moments`: one a block, of the coefficients in the order of the priors. */
  logEvidence(moments: readonly Moments[]): number {
    return this.over(0, moments);
  }

  /** Integrates over the scale of block `b` and those after it. */
  private over(b: number, moments: readonly Moments[]): number {
    if (b === this.likelihoods.length) return this.atWeights(moments);
    const likelihood = this.likelihoods[b];
    const constant = likelihood.logDensity(0);
    if (likelihood.exponent === null || likelihood.spread === null) {
      this.weights[b] = likelihood.scale;
      return constant + this.over(b + 1, moments);
    }
    const { exponent: m, spread: s } = likelihood;
    const at = (t: number): number => {
      const size = Math.exp(t);
      this.weights[b] = (2 * size) / s;
      return 0.5 * m * t - size + this.over(b + 1, moments);
    };
    return constant - logGamma(m / 2) + trapezoid(at, Math.log(m / 2), 0.5 * Math.sqrt(2 / m));
  }

  private atWeights(moments: readonly Moments[]): number {
    const { precision, y, weights, priors, floors } = this;
    const n = priors.length;
    let square = 0;
    for (let i = 0; i < n; i += 1) {
      y[i] = priors[i].precision * priors[i].mean;
      for (let j = 0; j <= i; j += 1) precision[i * n + j] = 0;
      precision[i * n + i] = priors[i].precision + floors[i];
    }
    for (let b = 0; b < moments.length; b += 1) {
      const w = weights[b];
      const { gram, linear } = moments[b];
      square += w * moments[b].square;
      for (let i = 0; i < n; i += 1) {
        y[i] += w * linear[i];
        for (let j = 0; j <= i; j += 1) precision[i * n + j] += w * gram[i * n + j];
      }
    }
    if (choleskyInto(precision, n, precision) >= 0) return NaN;
    forwardSolve(precision, n, y);
    let gain = 0;
    for (let i = 0; i < n; i += 1) gain += y[i] * y[i];
    return (
      this.logPrior +
      0.5 * (gain - square - logDeterminant(precision, n)) +
      lnBoxExpectation(precision, y, priors)
    );
  }
}

/**
 * ln ∫ exp f(t) dt by the trapezoidal rule with this step, from wherever exp f is largest outwards to where it is negligible.
 * `f` has one maximum; `start` is near it.
 */
function trapezoid(f: (t: number) => number, start: number, step: number): number {
  let best = f(start);
  if (Number.isNaN(best)) return NaN;
  const values = [best];
  const walk = (direction: 1 | -1): boolean => {
    let largest = best;
    for (let k = 1; k < 10_000; k += 1) {
      const value = f(start + direction * k * step);
      if (Number.isNaN(value)) return false;
      values.push(value);
      if (value > largest) largest = value;
      if (value < largest - NEGLIGIBLE) break;
    }
    best = largest;
    return true;
  };
  if (!walk(1) || !walk(-1)) return NaN;
  let sum = 0;
  for (const value of values) sum += Math.exp(value - best);
  return best + Math.log(sum * step);
}
