import { gaussLegendre } from '@/lib/templates';
import type { ScalarPrior } from './priors';
import { lnPriorDensity, priorMoments, priorSupport } from './priors';

/** Prior of a mass: a density, or a point mass at a fixed value that takes part in the order. */
export type MassPrior = ScalarPrior | { kind: 'fixed'; value: number };

/** Nodes of each panel. */
export const NODES = 16;
const PARTS = 8;

/** Gauss–Legendre nodes on (−1, 1), and the matrix that integrates the interpolant from −1 to each node and to 1. */
export const COLLOCATION = ((): { nodes: Float64Array; toNode: Float64Array[]; weights: Float64Array } => {
  const { nodes, weights } = gaussLegendre(NODES);
  const polynomials = Array.from(nodes, (x) => {
    const p = new Float64Array(NODES + 2);
    p[0] = 1;
    p[1] = x;
    for (let k = 1; k <= NODES; k += 1) p[k + 1] = ((2 * k + 1) * x * p[k] - k * p[k - 1]) / (k + 1);
    return p;
  });
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

/** One independent mass on the axis of an ordered chain. */
export type Link = { kind: 'density'; at: (x: number) => number } | { kind: 'point'; value: number };

/** The link of a prior, or of its mirror image at x → −x. */
export function linkOf(prior: MassPrior, mirrored = false): Link {
  const sign = mirrored ? -1 : 1;
  return prior.kind === 'fixed'
    ? { kind: 'point', value: sign * prior.value }
    : { kind: 'density', at: (x) => Math.exp(lnPriorDensity(prior, sign * x)) };
}

/** Values on panels: at the nodes of each, and at its upper end. */
export interface PanelValues {
  nodes: Float64Array[];
  ends: Float64Array;
}

/**
 * F_0 … F_n with F_0 = 1 and F_k(x) = P(x_1 < … < x_k < x) = ∫^x p_k F_{k−1}, by Gauss–Legendre panels between `edges`, which
 * have to hold every fixed value and every end of a density. Error below 1e-10 on the panels of `panelEdges`.
 */
export function orderedCumulatives(links: readonly Link[], edges: readonly number[]): PanelValues[] {
  const panels = edges.length - 1;
  const all: PanelValues[] = [
    {
      nodes: Array.from({ length: panels }, () => new Float64Array(NODES).fill(1)),
      ends: new Float64Array(panels).fill(1),
    },
  ];
  for (const link of links) {
    const before = all[all.length - 1];
    const nodes: Float64Array[] = [];
    const ends = new Float64Array(panels);
    let total = 0;
    for (let q = 0; q < panels; q += 1) {
      const values = new Float64Array(NODES);
      if (link.kind === 'point') {
        // Panels never straddle a fixed value: it is an edge.
        ends[q] = edges[q] >= link.value ? valueAt(link.value, edges, before.ends) : 0;
        values.fill(ends[q]);
      } else {
        const half = 0.5 * (edges[q + 1] - edges[q]);
        const integrand = new Float64Array(NODES);
        for (let i = 0; i < NODES; i += 1) {
          integrand[i] = half * link.at(nodeAt(edges, q, i)) * before.nodes[q][i];
        }
        for (let i = 0; i < NODES; i += 1) values[i] = total + dot(COLLOCATION.toNode[i], integrand);
        total += dot(COLLOCATION.weights, integrand);
        ends[q] = total;
      }
      nodes.push(values);
    }
    all.push({ nodes, ends });
  }
  return all;
}

/** Node i of panel q. */
export function nodeAt(edges: readonly number[], q: number, i: number): number {
  return edges[q] + 0.5 * (edges[q + 1] - edges[q]) * (1 + COLLOCATION.nodes[i]);
}

/** F at a fixed value, which is always the end of some panel (or before all of them, where F_k is 0 and F_0 is 1). */
function valueAt(value: number, edges: readonly number[], atEnd: Float64Array): number {
  const index = edges.indexOf(value);
  return index > 0 ? atEnd[index - 1] : 0;
}

/** Σ a_i b_i of arrays of one length. */
export function dot(a: Float64Array, b: Float64Array): number {
  let sum = 0;
  for (let i = 0; i < a.length; i += 1) sum += a[i] * b[i];
  return sum;
}

/** Panel edges: every bound, fixed value and shoulder of a normal, with the gaps cut into equal parts. */
export function panelEdges(priors: readonly MassPrior[]): number[] {
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
