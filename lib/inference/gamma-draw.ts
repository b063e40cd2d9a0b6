import type { Rng } from '@/lib/sampler';

/** A draw of Gamma(shape, 1), shape > ½: Marsaglia and Tsang (2000), ACM Trans. Math. Softw. 26, 363; below 1 by Γ(shape + 1) U^{1/shape}. */
export function drawGamma(rng: Rng, shape: number): number {
  if (shape < 1) return drawGamma(rng, shape + 1) * rng.uniform() ** (1 / shape);
  const d = shape - 1 / 3;
  const c = 1 / Math.sqrt(9 * d);
  for (;;) {
    const z = rng.normal();
    const v = (1 + c * z) ** 3;
    if (v > 0 && Math.log(rng.uniform()) < 0.5 * z * z + d * (1 - v + Math.log(v))) return d * v;
  }
}
