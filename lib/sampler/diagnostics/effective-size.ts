/**
 * Effective sample size of several chains by Geyer's initial sequences, and the plain potential scale reduction.
 * Source: Vehtari, Gelman, Simpson, Carpenter, Bürkner (2021), Bayesian Analysis 16, 667, with the truncation
 * of Geyer (1992), Statistical Science 7, 473. The chains are taken as given: splitting and ranking is the caller's.
 */
import { meanAutocovariance } from './autocovariance';

/** Below this many draws a (split) chain, no pair of autocorrelations beyond the first can be looked at. */
export const SHORTEST_CHAIN = 6;

/** Mean of the values, summed relative to the first so that a large offset costs no digits; NaN if empty. */
export function meanOf(values: Float64Array): number {
  const first = values[0];
  let sum = 0;
  for (let i = 0; i < values.length; i++) sum += values[i] - first;
  return values.length > 0 ? first + sum / values.length : NaN;
}

/** Variance with divisor n − 1; exactly 0 for a constant chain; NaN for n < 2. */
export function varianceOf(values: Float64Array): number {
  const n = values.length;
  if (n < 2) return NaN;
  const first = values[0];
  let sum = 0;
  for (let i = 0; i < n; i++) sum += values[i] - first;
  const mean = sum / n;
  let squares = 0;
  for (let i = 0; i < n; i++) squares += (values[i] - first - mean) ** 2;
  return squares / (n - 1);
}

/**
 * Plain R-hat, √[((n−1)/n W + B/n) / W], of m chains of n draws (Gelman and Rubin 1992).
 * NaN if n < 2, m < 2 or no chain moved (W = 0): chains that stand still have shown nothing.
 */
export function plainRhat(chains: readonly Float64Array[]): number {
  const n = chains.length > 0 ? chains[0].length : 0;
  if (n < 2 || chains.length < 2) return NaN;
  const between = varianceOf(Float64Array.from(chains, meanOf));
  const within = meanOf(Float64Array.from(chains, varianceOf));
  return within > 0 ? Math.sqrt((n - 1) / n + between / within) : NaN;
}

/** The chain minus its mean, relative to its first draw so that a large offset costs no digits. */
function centre(chain: Float64Array): Float64Array {
  const first = chain[0];
  const offset = meanOf(chain) - first;
  const result = new Float64Array(chain.length);
  for (let i = 0; i < chain.length; i++) result[i] = chain[i] - first - offset;
  return result;
}

/**
 * Effective sample size of m chains of n draws each: m n / τ with τ = −1 + 2 Σ ρ_t over Geyer's initial positive,
 * monotone sequence (plus the even term where the sum stops, if positive), τ floored at 1/log₁₀(m n).
 * NaN for chains shorter than SHORTEST_CHAIN, with a draw that isn't finite, or of which none moved.
 */
export function effectiveSize(chains: readonly Float64Array[]): number {
  const m = chains.length;
  const n = m > 0 ? chains[0].length : 0;
  if (n < SHORTEST_CHAIN) return NaN;
  const covariance = meanAutocovariance(chains.map(centre), n);
  const within = (covariance(0) * n) / (n - 1);
  const between = m > 1 ? varianceOf(Float64Array.from(chains, meanOf)) : 0;
  const total = (within * (n - 1)) / n + between;
  if (!(within > 0 && total < Infinity)) return NaN;

  const correlation = (lag: number) => 1 - (within - covariance(lag)) / total;
  const rho: number[] = [1, correlation(1)];
  let even = 1;
  let odd = rho[1];
  let last = 0;
  while (last < n - 5 && even + odd > 0) {
    last += 2;
    even = correlation(last);
    odd = correlation(last + 1);
    if (even + odd >= 0) rho.push(even, odd);
  }
  for (let t = 2; t <= last - 2; t += 2) {
    const before = rho[t - 2] + rho[t - 1];
    if (rho[t] + rho[t + 1] > before) {
      rho[t] = before / 2;
      rho[t + 1] = before / 2;
    }
  }
  let tau = -1;
  for (let t = 0; t < last; t++) tau += 2 * rho[t];
  if (even > 0) tau += even;
  const size = m * n;
  return size / Math.max(tau, 1 / Math.log10(size));
}
