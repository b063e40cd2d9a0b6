/** Nodes and weights of Gauss–Legendre quadrature on [−1, 1] by Newton's method on the Legendre polynomial. */
export function gaussLegendre(n: number): [node: number, weight: number][] {
  return Array.from({ length: n }, (_, i) => {
    let x = Math.cos((Math.PI * (i + 0.75)) / (n + 0.5));
    let slope = 1;
    for (let iteration = 0; iteration < 20; iteration += 1) {
      let [previous, value] = [1, x];
      for (let k = 2; k <= n; k += 1)
        [previous, value] = [value, ((2 * k - 1) * x * value - (k - 1) * previous) / k];
      slope = (n * (x * value - previous)) / (x * x - 1);
      x -= value / slope;
    }
    return [x, 2 / ((1 - x * x) * slope * slope)];
  });
}

const panel = gaussLegendre(24);

/** Mean of f(κ) over a bin with weight κ^q d ln κ, by 24-point panels that are short against an oscillation of `mu`. */
export function binMeanByQuadrature(
  f: (kappa: number) => number,
  lo: number,
  hi: number,
  q: number,
  mu: number,
): number {
  const [xa, xb] = [Math.log(lo), Math.log(hi)];
  const panels = Math.ceil((xb - xa) * (1 + mu / 4)) + 1;
  const half = (xb - xa) / (2 * panels);
  let numerator = 0;
  let denominator = 0;
  for (let k = 0; k < panels; k += 1) {
    for (const [node, weight] of panel) {
      const x = xa + half * (2 * k + 1 + node);
      const measure = weight * Math.exp(q * (x - xb));
      numerator += measure * f(Math.exp(x));
      denominator += measure;
    }
  }
  return numerator / denominator;
}
