/**
 * Densities that are linear between equally spaced nodes, drawn from and evaluated exactly. `values` are the heights at the
 * nodes (any scale, ≥ 0); both work on s in units of the spacing, counted from the first node.
 */

/** ∫ over all intervals between `count` nodes, in units of the spacing. */
function total(values: Float64Array, count: number): number {
  let sum = 0;
  for (let k = 0; k < count; k += 1) sum += values[k];
  return sum - 0.5 * (values[0] + values[count - 1]);
}

/** The position s ∈ [0, count − 1] at which the distribution passes u ∈ (0, 1). */
export function drawLinearDensity(values: Float64Array, count: number, u: number): number {
  let rest = u * total(values, count);
  let k = 0;
  for (; k < count - 2; k += 1) {
    const area = 0.5 * (values[k] + values[k + 1]);
    if (rest < area) break;
    rest -= area;
  }
  // Solve h₀ t + ½ (h₁ − h₀) t² = rest in the form that doesn't cancel.
  const slope = values[k + 1] - values[k];
  const root = Math.sqrt(Math.max(0, values[k] * values[k] + 2 * slope * rest));
  const t = values[k] + root > 0 ? (2 * rest) / (values[k] + root) : 0.5;
  return k + Math.min(1, Math.max(0, t));
}

/** ln density at s, for a spacing of 1; −Infinity outside. */
export function lnLinearDensity(values: Float64Array, count: number, s: number): number {
  if (!(s >= 0 && s <= count - 1)) return -Infinity;
  const k = Math.min(count - 2, Math.floor(s));
  const t = s - k;
  return Math.log((values[k] * (1 - t) + values[k + 1] * t) / total(values, count));
}
