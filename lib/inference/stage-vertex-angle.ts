import type { Rng } from '@/lib/sampler';
import type { FieldStage, FieldSystem } from './field-system';
import { GridDensity } from './grid-density';
import { scalarPriorOf, type ParameterLayout } from './parameter-layout';
import { drawFromPrior, lnPriorDensity, priorSupport, type ScalarPrior } from './priors';

/** Even cells of α, and as many again gathered. */
const CELLS = 24;
/** Part of α that is drawn from its prior. */
const FLOOR = 0.1;
/** The same where only the evidence of the masses is asked for. */
const COARSE_CELLS = 12;
/** With free phases α changes nothing but |C|, slowly: even nodes do for the evidence of the masses. */
const NODES = 6;

/**
 * A mixture of vertices whose angle α is sampled. Given the masses, α is drawn from a grid of its conditional with everything
 * else of the fields integrated out (the inner stage's evidence as a function of α), mixed with a tenth of its prior; then
 * the inner stage draws the rest given α. No Cartesian step in (g cos α, g sin α): the density of (g, α) has no factor |g|, so
 * the acceptance ratio stays bounded as g → 0.
 */
export class VertexAngleStage implements FieldStage {
  readonly exact = false;
  private readonly prior: ScalarPrior;
  private readonly grid: GridDensity;
  private readonly coarse: GridDensity;
  private readonly nodes: Float64Array;
  private readonly terms: Float64Array;
  private readonly probe: Float64Array;
  private readonly laidMasses: Float64Array;

  constructor(
    private readonly layout: ParameterLayout,
    private readonly inner: FieldStage,
  ) {
    const prior = scalarPriorOf(layout, layout.vertexAngle);
    if (!prior) throw new TypeError('the vertex angle is not sampled');
    this.prior = prior;
    const [lo, hi] = priorSupport(prior);
    this.grid = new GridDensity(lo, hi, CELLS);
    this.coarse = new GridDensity(lo, hi, COARSE_CELLS);
    const count = layout.template.structure === 'mixed-polar' ? NODES : 0;
    this.nodes = Float64Array.from({ length: count }, (_, k) => lo + ((hi - lo) * (k + 0.5)) / count);
    this.terms = new Float64Array(count);
    this.probe = Float64Array.from(layout.base);
    this.laidMasses = new Float64Array(layout.masses.length).fill(NaN);
  }

  logEvidence(system: FieldSystem, full: Float64Array): number {
    this.probe.set(full);
    const { nodes, terms } = this;
    if (nodes.length === 0) return this.coarse.lay((alpha) => this.lnConditional(system, alpha));
    let max = -Infinity;
    for (let k = 0; k < nodes.length; k += 1) {
      terms[k] = this.lnConditional(system, nodes[k]);
      if (terms[k] > max) max = terms[k];
    }
    let sum = 0;
    for (let k = 0; k < nodes.length; k += 1) sum += Math.exp(terms[k] - max);
    return max + Math.log(sum);
  }

  draw(rng: Rng, system: FieldSystem, full: Float64Array): void {
    const { vertexAngle } = this.layout;
    if (rng.uniform() < FLOOR) full[vertexAngle] = drawFromPrior(this.prior, rng);
    else {
      this.lay(system, full);
      full[vertexAngle] = this.grid.draw(rng);
    }
    this.inner.draw(rng, system, full);
  }

  logDensity(system: FieldSystem, full: Float64Array): number {
    const alpha = full[this.layout.vertexAngle];
    this.lay(system, full);
    const prior = Math.exp(lnPriorDensity(this.prior, alpha));
    const own = Math.log((1 - FLOOR) * this.grid.density(alpha) + FLOOR * prior);
    return own + this.inner.logDensity(system, full);
  }

  /** Lays the grid of α at the masses in `full`; the same masses again cost nothing. */
  private lay(system: FieldSystem, full: Float64Array): void {
    const { layout, laidMasses, probe } = this;
    let same = true;
    for (let f = 0; f < laidMasses.length; f += 1) {
      if (laidMasses[f] !== full[layout.masses[f]]) same = false;
      laidMasses[f] = full[layout.masses[f]];
    }
    if (same) return;
    probe.set(full);
    this.grid.lay((alpha) => this.lnConditional(system, alpha));
  }

  /** ln evidence of the masses in `probe` and α, times the prior of α. */
  private lnConditional(system: FieldSystem, alpha: number): number {
    this.probe[this.layout.vertexAngle] = alpha;
    return this.inner.logEvidence(system, this.probe) + lnPriorDensity(this.prior, alpha);
  }
}
