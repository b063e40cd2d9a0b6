import type { Rng } from '@/lib/sampler';
import { choleskyInto } from '../cholesky';
import { buildMetric } from '../metric';
import type { FitData, LikelihoodKind } from '../types';

/**
 * Noise as the likelihood takes the data to scatter about the prediction, at a fixed covariance C = F Fᵀ, z normal:
 * normal F z; hartlap F z/√h; the t forms F z √((N − 1)/χ²_ν), ν = m − p, which is the multivariate t that
 * (1 + χ²/(N − 1))^(−m/2) is. Every independent part of the data draws its own χ²_ν. Dimensionless, length p.
 *
 * @param sampled number of sampled parameters, on which the matched form's exponent depends
 */
export function buildNoise(
  kind: LikelihoodKind,
  data: Omit<FitData, 'S'>,
  sampled: number,
): (rng: Rng) => Float64Array {
  const p = Math.round(Math.sqrt(data.covariance.length));
  const factor = new Float64Array(p * p);
  const { covariance, parts } = buildMetric({ ...data, S: new Float64Array(p) }, kind, sampled);
  choleskyInto(covariance, p, factor);
  const sizes = new Float64Array(p);
  return (rng) => {
    const z = Float64Array.from({ length: p }, () => rng.normal());
    for (const { from, to, likelihood } of parts) {
      const { exponent, spread, scale } = likelihood;
      const size =
        exponent === null || spread === null
          ? 1 / Math.sqrt(scale)
          : Math.sqrt(spread / (2 * drawGamma(rng, (exponent - (to - from)) / 2)));
      sizes.fill(size, from, to);
    }
    return Float64Array.from(z, (_, i) => {
      let sum = 0;
      for (let j = 0; j <= i; j += 1) sum += factor[i * p + j] * z[j];
      return sizes[i] * sum;
    });
  };
}

/** One draw of the gamma distribution, scale 1, any shape > 0: Marsaglia and Tsang (2000), ACM TOMS 26, 363. */
export function drawGamma(rng: Rng, shape: number): number {
  if (shape < 1) return drawGamma(rng, shape + 1) * rng.uniform() ** (1 / shape);
  const d = shape - 1 / 3;
  const c = 1 / Math.sqrt(9 * d);
  for (;;) {
    const x = rng.normal();
    const v = (1 + c * x) ** 3;
    if (v > 0 && Math.log(rng.uniform()) < 0.5 * x * x + d - d * v + d * Math.log(v)) return d * v;
  }
}
