/** Nodes of an integral with their weights. */
export interface Nodes {
  readonly at: Float64Array;
  readonly weight: Float64Array;
}

/**
 * Gauss–Legendre on [lo, hi] with n nodes: exact for polynomials of degree 2n − 1. Nodes by Newton's method on P_n from
 * Tricomi's starting values.
 */
export function gaussLegendre(lo: number, hi: number, n: number): Nodes {
  const at = new Float64Array(n);
  const weight = new Float64Array(n);
  const half = 0.5 * (hi - lo);
  for (let j = 0; j < n; j += 1) {
    let x = Math.cos((Math.PI * (j + 0.75)) / (n + 0.5));
    let slope = 1;
    for (let step = 0; step < 60; step += 1) {
      let before = 1;
      let p = x;
      for (let k = 1; k < n; k += 1) [before, p] = [p, ((2 * k + 1) * x * p - k * before) / (k + 1)];
      slope = (n * (x * p - before)) / (x * x - 1);
      const change = p / slope;
      x -= change;
      if (Math.abs(change) < 1e-15) break;
    }
    at[n - 1 - j] = lo + half * (1 + x);
    weight[n - 1 - j] = (2 * half) / ((1 - x * x) * slope * slope);
  }
  return { at, weight };
}

/** The whole circle in n equal steps: converges geometrically for a smooth periodic function. */
export function circle(n: number): Nodes {
  const step = (2 * Math.PI) / n;
  return {
    at: Float64Array.from({ length: n }, (_, k) => -Math.PI + (k + 0.5) * step),
    weight: new Float64Array(n).fill(step),
  };
}

/** ln Σ exp(values); −Infinity for none. */
export function logSumExp(values: ArrayLike<number>): number {
  let largest = -Infinity;
  for (let i = 0; i < values.length; i += 1) if (values[i] > largest) largest = values[i];
  if (!(largest > -Infinity)) return largest;
  let sum = 0;
  for (let i = 0; i < values.length; i += 1) sum += Math.exp(values[i] - largest);
  return largest + Math.log(sum);
}
