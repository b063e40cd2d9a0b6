/** Nodes and weights on (−1, 1), by count. */
const known = new Map<number, { nodes: Float64Array; weights: Float64Array }>();

/**
 * Gauss–Legendre quadrature of n points on (−1, 1): Newton's iteration on P_n from the usual cosine guess, weights
 * 2/((1 − x²) P_n'(x)²) (Abramowitz and Stegun 25.4.29; from memory). Exact for polynomials to degree 2n − 1, n ≥ 1.
 */
export function gaussLegendre(n: number): { nodes: Float64Array; weights: Float64Array } {
  const kept = known.get(n);
  if (kept) return kept;
  const nodes = new Float64Array(n);
  const weights = new Float64Array(n);
  for (let j = 0; j < n; j += 1) {
    let x = -Math.cos((Math.PI * (j + 0.75)) / (n + 0.5));
    let slope = 1;
    for (let step = 0; step < 50; step += 1) {
      let previous = 1;
      let value = x;
      for (let k = 1; k < n; k += 1)
        [previous, value] = [value, ((2 * k + 1) * x * value - k * previous) / (k + 1)];
      slope = (n * (x * value - previous)) / (x * x - 1);
      const move = value / slope;
      x -= move;
      if (Math.abs(move) < 1e-16) break;
    }
    nodes[j] = x;
    weights[j] = 2 / ((1 - x * x) * slope * slope);
  }
  const rule = { nodes, weights };
  known.set(n, rule);
  return rule;
}
