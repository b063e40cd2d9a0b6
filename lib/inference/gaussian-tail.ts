import type { Rng } from '@/lib/sampler';

/**
 * The normal distribution far into its tails: scaled complementary error function, interval probabilities as
 * logarithms, and truncated draws.
 *
 * erfcx(x) = exp(x²) erfc(x) for x ≥ 0 comes from a Chebyshev expansion of (1 + 2x) erfcx(x) in
 * t = (x − 3.75)/(x + 3.75) (the variable of Shepherd and Laframboise 1981; from memory). Its coefficients are computed
 * once, here, from the power series and the continued fraction of erfc, so that no table of digits is trusted.
 */

const SQRT_PI = Math.sqrt(Math.PI);
const LN_SQRT_TWO_PI = 0.5 * Math.log(2 * Math.PI);
/** Beyond this many widths a tail is below 1e-17: nothing beside 1. */
const BEYOND = 8.5;
const MAPPING = 3.75;
const TERMS = 32;

/** exp(x²) erfc(x), x ≥ 0, by series (small x) or continued fraction: slow, relative error of about 1e-15. */
function erfcxDirect(x: number): number {
  if (x < 1) {
    let term = x;
    let sum = x;
    for (let n = 1; Math.abs(term) > 1e-18 * sum && n < 100; n += 1) {
      term *= (2 * x * x) / (2 * n + 1);
      sum += term;
    }
    return Math.exp(x * x) - (2 / SQRT_PI) * sum;
  }
  let tail = x;
  for (let k = 400; k >= 1; k -= 1) tail = x + k / 2 / tail;
  return 1 / (SQRT_PI * tail);
}

const CHEBYSHEV = ((): Float64Array => {
  const values = new Float64Array(TERMS);
  for (let k = 0; k < TERMS; k += 1) {
    const t = Math.cos((Math.PI * (k + 0.5)) / TERMS);
    const x = (MAPPING * (1 + t)) / (1 - t);
    values[k] = (1 + 2 * x) * erfcxDirect(x);
  }
  const c = new Float64Array(TERMS);
  for (let j = 0; j < TERMS; j += 1) {
    let sum = 0;
    for (let k = 0; k < TERMS; k += 1) sum += values[k] * Math.cos((Math.PI * j * (k + 0.5)) / TERMS);
    c[j] = (2 / TERMS) * sum;
  }
  return c;
})();

/** exp(x²) erfc(x) for x ≥ 0 (+Infinity gives 0). Relative error below 1e-14. */
export function erfcx(x: number): number {
  if (x > 1e8) return 1 / (SQRT_PI * x);
  const t = (x - MAPPING) / (x + MAPPING);
  const twice = 2 * t;
  let a = 0;
  let b = 0;
  for (let j = TERMS - 1; j >= 1; j -= 1) {
    const next = twice * a - b + CHEBYSHEV[j];
    b = a;
    a = next;
  }
  return (t * a - b + 0.5 * CHEBYSHEV[0]) / (1 + 2 * x);
}

/** Φ(z), the standard normal distribution function. Relative error below 1e-13 for z ≥ −37. */
export function normalCdf(z: number): number {
  const half = 0.5 * Math.exp(-0.5 * z * z) * erfcx(Math.abs(z) * Math.SQRT1_2);
  return z < 0 ? half : 1 - half;
}

/**
 * ln[Φ(b) − Φ(a)] for a < b, infinite bounds allowed; −Infinity where b ≤ a. Accurate far out in either tail and for
 * narrow intervals (relative error of the probability below 1e-10).
 */
export function lnNormalInterval(a: number, b: number): number {
  if (!(a < b)) return -Infinity;
  const width = b - a;
  if (width < 1e-4) {
    const middle = a + 0.5 * width;
    return (
      -0.5 * middle * middle - LN_SQRT_TWO_PI + Math.log(width) + ((middle * middle - 1) * width * width) / 24
    );
  }
  if (a > 0) return lnUpperInterval(a, b);
  if (b < 0) return lnUpperInterval(-b, -a);
  const below = a < -BEYOND ? 0 : 0.5 * Math.exp(-0.5 * a * a) * erfcx(-a * Math.SQRT1_2);
  const above = b > BEYOND ? 0 : 0.5 * Math.exp(-0.5 * b * b) * erfcx(b * Math.SQRT1_2);
  const outside = below + above;
  return outside === 0 ? 0 : Math.log1p(-outside);
}

/** ln[Φ(b) − Φ(a)] for 0 ≤ a < b. */
function lnUpperInterval(a: number, b: number): number {
  const near = erfcx(a * Math.SQRT1_2);
  const far = b === Infinity ? 0 : Math.exp(-0.5 * (b - a) * (b + a)) * erfcx(b * Math.SQRT1_2);
  return -0.5 * a * a + Math.log(0.5 * (near - far));
}

/**
 * ln density at x of the normal (mean, sd) restricted to [lo, hi] and renormalised; −Infinity outside. `sd` > 0;
 * the bounds may be infinite.
 */
export function lnTruncatedNormal(x: number, mean: number, sd: number, lo: number, hi: number): number {
  if (x < lo || x > hi) return -Infinity;
  const z = (x - mean) / sd;
  const free = -0.5 * z * z - LN_SQRT_TWO_PI - Math.log(sd);
  if (lo === -Infinity && hi === Infinity) return free;
  return free - lnNormalInterval((lo - mean) / sd, (hi - mean) / sd);
}

/**
 * One exact draw from the normal (mean, sd) restricted to [lo, hi], by rejection from the cheapest of: the normal
 * itself, its half, a uniform, or a shifted exponential (Robert 1995, Statistics and Computing 5, 121; from memory).
 */
export function drawTruncatedNormal(rng: Rng, mean: number, sd: number, lo: number, hi: number): number {
  if (lo === -Infinity && hi === Infinity) return mean + sd * rng.normal();
  const a = (lo - mean) / sd;
  const b = (hi - mean) / sd;
  const z = a >= 0 || (a > -b && b > 0) ? drawStandard(rng, a, b) : -drawStandard(rng, -b, -a);
  // Rounding may carry the result past a bound by one unit in the last place.
  return Math.min(hi, Math.max(lo, mean + sd * z));
}

/** Standard normal on [a, b], where the interval lies no further to the left of 0 than to the right. */
function drawStandard(rng: Rng, a: number, b: number): number {
  if (a > 0.4) {
    const rate = 0.5 * (a + Math.sqrt(a * a + 4));
    if (rate * (b - a) > 1) {
      for (;;) {
        const z = a - Math.log(rng.uniform()) / rate;
        if (z <= b && Math.log(rng.uniform()) < -0.5 * (z - rate) * (z - rate)) return z;
      }
    }
  } else if (b - a > 1.5) {
    for (;;) {
      const z = rng.normal();
      if (z >= a && z <= b) return z;
    }
  }
  const nearest = a > 0 ? a : 0;
  for (;;) {
    const z = a + (b - a) * rng.uniform();
    if (Math.log(rng.uniform()) < 0.5 * (nearest * nearest - z * z)) return z;
  }
}
