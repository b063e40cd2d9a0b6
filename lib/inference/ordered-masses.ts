import type { Rng } from '@/lib/sampler';
import { drawFromPrior, lnPriorDensity, priorMoments, priorSupport, type ScalarPrior } from './priors';

/**
 * Independent priors of masses that are put in ascending order: the joint density is Π p_i · 1[x_1 < x_2 < …] / Z with
 * Z = P(x_1 < x_2 < …). A fixed mass is a point mass at its value and takes part in the order.
 */
export type MassPrior = ScalarPrior | { kind: 'fixed'; value: number };

const NODES = 16;
const PARTS = 8;

/** Gauss–Legendre nodes on (−1, 1), and the matrix that integrates the interpolant from −1 to each node and to 1. */
const COLLOCATION = ((): { nodes: Float64Array; toNode: Float64Array[]; weights: Float64Array } => {
  const legendre = (n: number, x: number): { p: Float64Array; slope: number } => {
    const p = new Float64Array(n + 2);
    p[0] = 1;
    p[1] = x;
    for (let k = 1; k <= n; k += 1) p[k + 1] = ((2 * k + 1) * x * p[k] - k * p[k - 1]) / (k + 1);
    return { p, slope: (n * (x * p[n] - p[n - 1])) / (x * x - 1) };
  };
  const nodes = new Float64Array(NODES);
  const weights = new Float64Array(NODES);
  for (let j = 0; j < NODES; j += 1) {
    let x = -Math.cos((Math.PI * (j + 0.75)) / (NODES + 0.5));
    for (let step = 0; step < 50; step += 1) {
      const { p, slope } = legendre(NODES, x);
      x -= p[NODES] / slope;
    }
    nodes[j] = x;
    weights[j] = 2 / ((1 - x * x) * legendre(NODES, x).slope ** 2);
  }
  const polynomials = Array.from(nodes, (x) => legendre(NODES, x).p);
  const toNode = polynomials.map((upper, i) => {
    const row = new Float64Array(NODES);
    for (let j = 0; j < NODES; j += 1) {
      // ∫_{−1}^x P_k = (P_{k+1}(x) − P_{k−1}(x)) / (2k + 1); P_0 integrates to x + 1.
      let sum = 0.5 * (nodes[i] + 1);
      for (let k = 1; k < NODES; k += 1) sum += 0.5 * polynomials[j][k] * (upper[k + 1] - upper[k - 1]);
      row[j] = weights[j] * sum;
    }
    return row;
  });
  return { nodes, toNode, weights };
})();

/**
 * ln P(x_1 < x_2 < …) of independent masses with these priors, in this order; −Infinity if no order is possible.
 * 1/n! for equal priors, else F_k(x) = ∫^x p_k F_{k−1} by Gauss–Legendre panels between all bounds (error of Z below
 * 1e-10). 0 for fewer than two masses.
 */
export function logOrderProbability(priors: readonly MassPrior[]): number {
  if (priors.length < 2) return 0;
  const first = JSON.stringify(priors[0]);
  if (priors[0].kind !== 'fixed' && priors.every((prior) => JSON.stringify(prior) === first)) {
    let ln = 0;
    for (let n = 2; n <= priors.length; n += 1) ln -= Math.log(n);
    return ln;
  }
  const edges = panelEdges(priors);
  const panels = edges.length - 1;
  // F at the nodes of every panel, and at its end; F_0 = 1.
  let atNodes: Float64Array[] = Array.from({ length: panels }, () => new Float64Array(NODES).fill(1));
  let atEnd: Float64Array = new Float64Array(panels).fill(1);
  for (const prior of priors) {
    const nextNodes: Float64Array[] = [];
    const nextEnd = new Float64Array(panels);
    let total = 0;
    for (let q = 0; q < panels; q += 1) {
      const half = 0.5 * (edges[q + 1] - edges[q]);
      const values = new Float64Array(NODES);
      if (prior.kind === 'fixed') {
        // Panels never straddle a fixed value: it is an edge.
        values.fill(edges[q] >= prior.value ? 1 : 0);
        for (let i = 0; i < NODES; i += 1) values[i] *= valueAt(prior.value, edges, atEnd);
        nextEnd[q] = edges[q] >= prior.value ? valueAt(prior.value, edges, atEnd) : 0;
      } else {
        const integrand = new Float64Array(NODES);
        for (let i = 0; i < NODES; i += 1) {
          const x = edges[q] + half * (1 + COLLOCATION.nodes[i]);
          integrand[i] = half * Math.exp(lnPriorDensity(prior, x)) * atNodes[q][i];
        }
        for (let i = 0; i < NODES; i += 1) values[i] = total + dot(COLLOCATION.toNode[i], integrand);
        total += dot(COLLOCATION.weights, integrand);
        nextEnd[q] = total;
      }
      nextNodes.push(values);
    }
    atNodes = nextNodes;
    atEnd = nextEnd;
  }
  const z = atEnd[panels - 1];
  return z > 1e-12 ? Math.log(Math.min(1, z)) : -Infinity;
}

/** F at a fixed value, which is always the end of some panel (or before all of them, where F_k is 0 and F_0 is 1). */
function valueAt(value: number, edges: readonly number[], atEnd: Float64Array): number {
  const index = edges.indexOf(value);
  return index > 0 ? atEnd[index - 1] : 0;
}

function dot(a: Float64Array, b: Float64Array): number {
  let sum = 0;
  for (let i = 0; i < a.length; i += 1) sum += a[i] * b[i];
  return sum;
}

/** Panel edges: every bound, fixed value and shoulder of a normal, with the gaps cut into equal parts. */
function panelEdges(priors: readonly MassPrior[]): number[] {
  const marks = new Set<number>();
  for (const prior of priors) {
    if (prior.kind === 'fixed') {
      // One mark below, so that the fixed value is the end of a panel.
      marks
        .add(prior.value)
        .add(prior.value - 1)
        .add(prior.value + 1);
      continue;
    }
    const [lo, hi] = priorSupport(prior);
    const centre = 'mean' in prior ? prior.mean : prior.kind === 'half-normal' ? 0 : priorMoments(prior).mean;
    const sd = 'sd' in prior ? prior.sd : priorMoments(prior).sd;
    for (const z of [-10, -5, -2.5, -1, 0, 1, 2.5, 5, 10]) {
      if ('sd' in prior) marks.add(Math.min(hi, Math.max(lo, centre + z * sd)));
    }
    if (Number.isFinite(lo)) marks.add(lo);
    if (Number.isFinite(hi)) marks.add(hi);
    if (prior.kind === 'log-uniform') for (let x = 2 * lo; x < hi; x *= 2) marks.add(x);
  }
  const sorted = [...marks].sort((a, b) => a - b);
  const edges: number[] = [sorted[0]];
  for (let i = 1; i < sorted.length; i += 1) {
    for (let part = 1; part < PARTS; part += 1) {
      edges.push(sorted[i - 1] + ((sorted[i] - sorted[i - 1]) * part) / PARTS);
    }
    edges.push(sorted[i]);
  }
  return edges;
}

/**
 * One exact draw of ordered masses into `out`: equal priors are sorted, others drawn until they are in order (each
 * mass above the one before it by construction where the priors allow, so the number of tries is about 1/Z).
 */
export function drawOrderedMasses(priors: readonly MassPrior[], rng: Rng, out: Float64Array): void {
  const first = JSON.stringify(priors[0]);
  const equal = priors.every((prior) => JSON.stringify(prior) === first);
  for (;;) {
    for (let i = 0; i < priors.length; i += 1) {
      const prior = priors[i];
      out[i] = prior.kind === 'fixed' ? prior.value : drawFromPrior(prior, rng);
    }
    if (equal) out.subarray(0, priors.length).sort();
    let ordered = true;
    for (let i = 1; i < priors.length; i += 1) if (!(out[i] > out[i - 1])) ordered = false;
    if (ordered) return;
  }
}
