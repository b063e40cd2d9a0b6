const SQRT_HALF_PI = Math.sqrt(Math.PI / 2);

/**
 * exp(x²) erfc(x) for x ≥ 0, roughly: the five-term form of Abramowitz and Stegun 7.1.26 (from memory). Within 2e-7 near 0, high
 * by up to 40 % far out; always positive. Proposals may use it, densities may not.
 */
function roughErfcx(x: number): number {
  const t = 1 / (1 + 0.3275911 * x);
  return t * (0.254829592 + t * (-0.284496736 + t * (1.421413741 + t * (-1.453152027 + t * 1.061405429))));
}

/**
 * How much of a unit Gaussian lies in [a, b] relative to its highest density there: about
 * ∫_a^b exp(−z²/2) dz / exp(−½ z₀²), z₀ the point of [a, b] nearest 0. Rough (see `roughErfcx`), cheap, positive for a < b.
 */
export function rayShape(a: number, b: number): number {
  if (a >= 0) return SQRT_HALF_PI * tail(a, b);
  if (b <= 0) return SQRT_HALF_PI * tail(-b, -a);
  const below = a < -6 ? 0 : Math.exp(-0.5 * a * a) * roughErfcx(-a * Math.SQRT1_2);
  const above = b > 6 ? 0 : Math.exp(-0.5 * b * b) * roughErfcx(b * Math.SQRT1_2);
  return SQRT_HALF_PI * (2 - below - above);
}

/** exp(a²/2) √(2/π) ∫_a^b exp(−z²/2) dz for 0 ≤ a < b. */
function tail(a: number, b: number): number {
  const step = b - a;
  if (step < 1e-2) return (step / SQRT_HALF_PI) * Math.max(0.1, 1 - 0.5 * a * step);
  const near = roughErfcx(a * Math.SQRT1_2);
  const fall = 0.5 * step * (a + b);
  return fall > 20 ? near : near - Math.exp(-fall) * roughErfcx(b * Math.SQRT1_2);
}
