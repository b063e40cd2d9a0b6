import { normalQuantile } from '@/lib/sampler';
import { lnNormalInterval, normalCdf } from '../gaussian-tail';
import type { LinearPrior } from './linear-prior';

/** Points of the lattice for two or more bounds that bind. */
const POINTS = 512;
/** A bound this many sd away cuts off less than 1e-15. */
const FAR = 8;
/** Square roots of primes: the generators of Richtmyer's lattice. */
const GENERATORS = [2, 3, 5, 7, 11, 13, 17, 19, 23, 29, 31, 37, 41, 43, 47, 53].map((prime) =>
  Math.sqrt(prime),
);

/**
 * ln E[Π x_j^power_j · 1(lo ≤ x ≤ hi)] under the normal with precision L Lᵀ (row-major lower factor) and L⁻¹h = `y`: what the
 * bounds of priors leave of a Gaussian integral. Exact where no bound binds or one does (without a power); else by sequential
 * conditioning on a fixed lattice of 512 points (Genz 1992, J. Comput. Graph. Statist. 1, 141), with an error below 1 %
 * and the same points every time, so that a scan stays smooth.
 */
export function lnBoxExpectation(l: Float64Array, y: Float64Array, priors: readonly LinearPrior[]): number {
  const n = priors.length;
  if (!priors.some(({ lo, hi, power }) => lo > -Infinity || hi < Infinity || power !== 0)) return 0;
  const { mean, sd } = marginals(l, y, n);
  const binding: number[] = [];
  let powers = false;
  for (let j = 0; j < n; j += 1) {
    const { lo, hi, power } = priors[j];
    if (power !== 0) powers = true;
    if (lo > mean[j] - FAR * sd[j] || hi < mean[j] + FAR * sd[j]) binding.push(j);
  }
  if (!powers && binding.length === 0) return 0;
  if (!powers && binding.length === 1) {
    const [j] = binding;
    return lnNormalInterval((priors[j].lo - mean[j]) / sd[j], (priors[j].hi - mean[j]) / sd[j]);
  }
  return lattice(l, y, priors);
}

function marginals(l: Float64Array, y: Float64Array, n: number): { mean: Float64Array; sd: Float64Array } {
  const mean = new Float64Array(n);
  const sd = new Float64Array(n);
  for (let i = n - 1; i >= 0; i -= 1) {
    let sum = y[i];
    for (let k = i + 1; k < n; k += 1) sum -= l[k * n + i] * mean[k];
    mean[i] = sum / l[i * n + i];
  }
  // Column j of L⁻¹ gives the covariance's diagonal: Σ = L⁻ᵀ L⁻¹.
  const inverse = new Float64Array(n);
  for (let j = 0; j < n; j += 1) {
    inverse.fill(0);
    for (let i = j; i < n; i += 1) {
      let sum = i === j ? 1 : 0;
      for (let k = j; k < i; k += 1) sum -= l[i * n + k] * inverse[k];
      inverse[i] = sum / l[i * n + i];
    }
    let variance = 0;
    for (let i = j; i < n; i += 1) variance += inverse[i] * inverse[i];
    sd[j] = Math.sqrt(variance);
  }
  return { mean, sd };
}

function lattice(l: Float64Array, y: Float64Array, priors: readonly LinearPrior[]): number {
  const n = priors.length;
  const x = new Float64Array(n);
  const logs = new Float64Array(POINTS);
  let largest = -Infinity;
  for (let point = 0; point < POINTS; point += 1) {
    let sum = 0;
    for (let j = n - 1; j >= 0 && sum > -Infinity; j -= 1) {
      let rest = y[j];
      for (let i = j + 1; i < n; i += 1) rest -= l[i * n + j] * x[i];
      const scale = 1 / l[j * n + j];
      const { lo, hi, power } = priors[j];
      const a = (lo - rest * scale) / scale;
      const b = (hi - rest * scale) / scale;
      // Baker's transform makes the lattice periodic.
      const phase = ((point + 0.5) * GENERATORS[j % GENERATORS.length]) % 1;
      const u = Math.abs(2 * phase - 1);
      sum += lnNormalInterval(a, b);
      x[j] = rest * scale + scale * quantileWithin(a, b, u);
      if (power !== 0) sum += power * Math.log(Math.max(x[j], lo));
    }
    logs[point] = sum;
    if (sum > largest) largest = sum;
  }
  if (largest === -Infinity) return -Infinity;
  let total = 0;
  for (let point = 0; point < POINTS; point += 1) total += Math.exp(logs[point] - largest);
  return largest + Math.log(total / POINTS);
}

/** The standard normal's quantile at u of what lies in [a, b]; in the far tails by the exponential that it is there. */
function quantileWithin(a: number, b: number, u: number): number {
  if (a > 5) return a - Math.log1p(-u * -Math.expm1(-a * Math.min(b - a, 700 / a))) / a;
  if (b < -5) return -quantileWithin(-b, -a, 1 - u);
  const from = normalCdf(a);
  const p = from + u * (normalCdf(b) - from);
  return Math.min(b, Math.max(a, normalQuantile(Math.min(1 - 1e-16, Math.max(1e-300, p)))));
}
