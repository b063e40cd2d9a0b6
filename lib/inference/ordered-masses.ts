import type { Rng } from '@/lib/sampler';
import {
  COLLOCATION,
  dot,
  linkOf,
  nodeAt,
  NODES,
  orderedCumulatives,
  panelEdges,
  type MassPrior,
} from './order-quadrature';
import { drawFromPrior } from './priors';

export type { MassPrior } from './order-quadrature';

/**
 * Independent priors of masses that are put in ascending order: the joint density is Π p_i · 1[x_1 < x_2 < …] / Z with
 * Z = P(x_1 < x_2 < …). A fixed mass is a point mass at its value and takes part in the order.
 */

/**
 * ln P(x_1 < x_2 < …) of independent masses with these priors, in this order; −Infinity if no order is possible.
 * 1/n! for equal priors, else F_k(x) = ∫^x p_k F_{k−1} by Gauss–Legendre panels between all bounds (error of Z below
 * 1e-10). 0 for fewer than two masses.
 */
export function logOrderProbability(priors: readonly MassPrior[]): number {
  if (priors.length < 2) return 0;
  if (priors[0].kind !== 'fixed' && areEqual(priors)) {
    let ln = 0;
    for (let n = 2; n <= priors.length; n += 1) ln -= Math.log(n);
    return ln;
  }
  const edges = panelEdges(priors);
  const { ends } = orderedCumulatives(
    priors.map((prior) => linkOf(prior)),
    edges,
  )[priors.length];
  const z = ends[ends.length - 1];
  return z > 1e-12 ? Math.log(Math.min(1, z)) : -Infinity;
}

/** What order leaves of one mass' prior, on a rising grid: density and distribution function at each x. */
export interface OrderedMarginal {
  x: Float64Array;
  density: Float64Array;
  cdf: Float64Array;
}

/**
 * The marginal of mass `index` under the joint density Π p_i · 1[x_1 < x_2 < …] / Z: p_k(x) F(x) G(x) / Z with
 * F(x) = P(x_1 < … < x_{k−1} < x) and G(x) = P(x < x_{k+1} < …), both by the quadrature behind Z; G is the F of the mirrored
 * chain. For n equal uniform priors it is the density of the k-th order statistic, a Beta(k, n + 1 − k) on the range. Error of
 * the distribution function below 1e-9. Null for a fixed mass, and where no order is possible.
 */
export function orderedMarginal(priors: readonly MassPrior[], index: number): OrderedMarginal | null {
  const own = priors[index];
  if (own.kind === 'fixed') return null;
  const edges = panelEdges(priors);
  const panels = edges.length - 1;
  const below = orderedCumulatives(
    priors.slice(0, index).map((prior) => linkOf(prior)),
    edges,
  )[index];
  const later = priors.slice(index + 1).reverse();
  const above = orderedCumulatives(
    later.map((prior) => linkOf(prior, true)),
    edges.map((edge) => -edge).reverse(),
  )[later.length];
  const density = linkOf(own);
  if (density.kind === 'point') return null;
  const out = {
    x: new Float64Array(panels * NODES),
    density: new Float64Array(panels * NODES),
    cdf: new Float64Array(panels * NODES),
  };
  let total = 0;
  for (let q = 0; q < panels; q += 1) {
    const half = 0.5 * (edges[q + 1] - edges[q]);
    const integrand = new Float64Array(NODES);
    for (let i = 0; i < NODES; i += 1) {
      const at = q * NODES + i;
      out.x[at] = nodeAt(edges, q, i);
      out.density[at] =
        density.at(out.x[at]) * below.nodes[q][i] * above.nodes[panels - 1 - q][NODES - 1 - i];
      integrand[i] = half * out.density[at];
    }
    for (let i = 0; i < NODES; i += 1) {
      out.cdf[q * NODES + i] = total + dot(COLLOCATION.toNode[i], integrand);
    }
    total += dot(COLLOCATION.weights, integrand);
  }
  if (!(total > 1e-12)) return null;
  for (let i = 0; i < out.x.length; i += 1) {
    out.density[i] /= total;
    out.cdf[i] /= total;
  }
  return out;
}

/** Whether all priors are the same, so that order is a matter of sorting. */
export function areEqual(priors: readonly MassPrior[]): boolean {
  const first = JSON.stringify(priors[0]);
  return priors.every((prior) => JSON.stringify(prior) === first);
}

/**
 * One exact draw of ordered masses into `out`: equal priors are sorted, others drawn until they are in order (each
 * mass above the one before it by construction where the priors allow, so the number of tries is about 1/Z). `equal`:
 * what `areEqual` says of the priors.
 */
export function drawOrderedMasses(
  priors: readonly MassPrior[],
  rng: Rng,
  out: Float64Array,
  equal = areEqual(priors),
): void {
  for (;;) {
    for (let i = 0; i < priors.length; i += 1) {
      const prior = priors[i];
      out[i] = prior.kind === 'fixed' ? prior.value : drawFromPrior(prior, rng);
    }
    if (equal) (out.length === priors.length ? out : out.subarray(0, priors.length)).sort();
    let ordered = true;
    for (let i = 1; i < priors.length; i += 1) if (!(out[i] > out[i - 1])) ordered = false;
    if (ordered) return;
  }
}
