import { betaQuantile, createRng, normalQuantile } from '@/lib/sampler';
import { drawGamma } from './gamma-draw';
import { buildLikelihood } from './likelihoods';
import type { LikelihoodKind } from './types';

/** What a credible interval is worth when the covariance comes from mocks. */
export interface IntervalCoverage {
  /** Share of the trials in which the interval holds the true value. */
  covered: number;
  /** Its standard error, from the number of trials. */
  error: number;
  /** Mean width of the interval over that with the covariance known. */
  width: number;
}

export interface CoverageAsked {
  likelihood: LikelihoodKind;
  /** Data values p, mocks N, fitted parameters n_p, all linear, with flat priors; N > p + 4, 0 < n_p < p. */
  length: number;
  mocks: number;
  parameters: number;
  /** Content of the central credible interval of one parameter, 0.68 say. */
  content: number;
  trials: number;
}

/**
 * How often a central credible interval of one parameter of a linear model holds the truth, over data and mocks drawn anew,
 * N(0, C) both. It depends on p, N and n_p alone (any C and any design can be turned into C = 1 with the parameters as the
 * first n_p data values), and there a trial needs three numbers of the Wishart matrix W = (N − 1) S (Muirhead 1982, Aspects of
 * Multivariate Statistical Theory, theorem 3.2.10; from memory, held to whole simulations by the tests):
 *
 *   q   = d₂ᵀ W₂₂⁻¹ d₂     = χ²(p − n_p) / χ²(N − p + n_p),   the best fit's χ² over N − 1,
 *   θ̂ − θ                   ~ N(0, 1 + q),
 *   s²  = (F⁻¹)₁₁            = χ²(N − 1 − p + n_p) / (N − 1),  the width squared that S gives.
 *
 * Normal forms: ± z s/√h. t forms, exponent m: a t of m − n_p degrees of freedom, of scale² s² (N − 1)(1 + q)/(m − n_p).
 * Throws InferenceError `too_few_mocks` as `buildLikelihood`.
 */
export function intervalCoverage(asked: CoverageAsked, seed: string): IntervalCoverage {
  const rng = createRng(seed);
  const { likelihood: kind, length: p, mocks: n, parameters: k, content, trials } = asked;
  const { scale, exponent } = buildLikelihood(kind, n, p, k, 0);
  const freedom = exponent === null ? NaN : exponent - k;
  const times = exponent === null ? normalQuantile(0.5 + content / 2) : studentHalfWidth(content, freedom);
  let inside = 0;
  let widths = 0;
  for (let trial = 0; trial < trials; trial += 1) {
    const q = drawGamma(rng, (p - k) / 2) / drawGamma(rng, (n - p + k) / 2);
    const offset = Math.abs(rng.normal()) * Math.sqrt(1 + q);
    const s2 = (2 * drawGamma(rng, (n - 1 - p + k) / 2)) / (n - 1);
    const half = times * Math.sqrt(exponent === null ? s2 / scale : (s2 * (n - 1) * (1 + q)) / freedom);
    if (offset < half) inside += 1;
    widths += half;
  }
  const covered = inside / trials;
  return {
    covered,
    error: Math.sqrt((covered * (1 - covered)) / trials),
    width: widths / trials / normalQuantile(0.5 + content / 2),
  };
}

/** The t with P(|T| < t) = content at this number of degrees of freedom: t²/(ν + t²) ~ Beta(½, ν/2). */
function studentHalfWidth(content: number, freedom: number): number {
  const u = betaQuantile(content, 0.5, freedom / 2);
  return Math.sqrt((freedom * u) / (1 - u));
}
