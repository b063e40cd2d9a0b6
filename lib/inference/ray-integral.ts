import { erfcx } from './gaussian-tail';

const SQRT_HALF_PI = Math.sqrt(Math.PI / 2);

/**
 * ln ∫_lo^hi exp(−½ q A² + l A) dA for q > 0 and lo < hi (hi may be infinite): how much of a Gaussian lies along a ray.
 * Relative error of the integral below 1e-12, far from the peak as well.
 */
export function lnRayIntegral(q: number, l: number, lo: number, hi: number): number {
  const width = 1 / Math.sqrt(q);
  const mean = l / q;
  const a = (lo - mean) / width;
  const b = (hi - mean) / width;
  const peak = 0.5 * l * mean;
  if (a >= 0) return peak - 0.5 * a * a + Math.log(width * SQRT_HALF_PI * tailDifference(a, b));
  if (b <= 0) return peak - 0.5 * b * b + Math.log(width * SQRT_HALF_PI * tailDifference(-b, -a));
  const outside =
    Math.exp(-0.5 * a * a) * erfcx(-a * Math.SQRT1_2) +
    (b === Infinity ? 0 : Math.exp(-0.5 * b * b) * erfcx(b * Math.SQRT1_2));
  return peak + Math.log(width * SQRT_HALF_PI * (2 - outside));
}

/** exp(a²/2) √(2/π) ∫_a^b exp(−z²/2) dz for 0 ≤ a < b. */
function tailDifference(a: number, b: number): number {
  const step = b - a;
  if (step < 1e-5) return (step / SQRT_HALF_PI) * (1 - 0.5 * a * step);
  const near = erfcx(a * Math.SQRT1_2);
  return b === Infinity ? near : near - Math.exp(-0.5 * step * (a + b)) * erfcx(b * Math.SQRT1_2);
}
