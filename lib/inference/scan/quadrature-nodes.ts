import { gaussLegendre as gaussLegendreRule } from '@/lib/templates';

/** Nodes of an integral with their weights. */
export interface Nodes {
  readonly at: Float64Array;
  readonly weight: Float64Array;
}

/** Gauss–Legendre on [lo, hi] with n nodes, ascending: exact for polynomials of degree 2n − 1. */
export function gaussLegendre(lo: number, hi: number, n: number): Nodes {
  const { nodes, weights } = gaussLegendreRule(n);
  const half = 0.5 * (hi - lo);
  return { at: nodes.map((x) => lo + half * (1 + x)), weight: weights.map((w) => half * w) };
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
