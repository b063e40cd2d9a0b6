import { logIsotropicDensity, mixingWeights } from '@/lib/templates';
import type { FieldSystem, MassEvidence } from './field-system';
import { FieldUnits } from './field-units';
import { scalarPriorOf, type ParameterLayout } from './parameter-layout';
import { lnPriorDensity, priorMoments, priorSupport, type ScalarPrior } from './priors';

/** Cells of the mixing angle. */
const CELLS = 24;
/** Nodes of α for the moments of its prior. */
const NODES = 64;

/**
 * Evidence of the masses of one or two fields of a mixture of vertices, g and α sampled, phases locked. Given masses and weights
 * the signal is linear in the pair (g cos α, g sin α), z: its columns are X = Σ w_i u_i(α = 0) and Y = Σ w_i u_i(α = π/2). The pair
 * is integrated out under a normal of mean 0 and the second moments R that the priors of g and α give, and the weights are
 * summed over cells of the angle. As the prior of the pair falls as 1/|z| where α is uniform, and the normal doesn't, each
 * term is multiplied by (prior/normal) at the root mean square of |z| under the conditional. An approximation: it only
 * shapes the proposal.
 */
export class PairEvidence implements MassEvidence {
  private readonly units: FieldUnits;
  private readonly weights: Float64Array[] = [];
  private readonly cellPriors: number[] = [];
  /** R⁻¹ (upper triangle) and ½ tr R. */
  private readonly precision = new Float64Array(3);
  private readonly half: number;
  private readonly determinant: number;
  /** How far the prior's directions are from a single one: 1 for uniform α, 0 for a fixed one. */
  private readonly roundness: number;
  private readonly probe: Float64Array;
  private readonly first: Float64Array;
  private readonly second: Float64Array;
  private readonly terms: Float64Array;
  private readonly factors: Float64Array;

  constructor(
    private readonly layout: ParameterLayout,
    coupling: ScalarPrior,
    vertex: ScalarPrior,
  ) {
    const { angles, base, position } = layout;
    this.units = new FieldUnits(layout);
    const { mean, sd } = priorMoments(coupling);
    const square = mean * mean + sd * sd;
    const [lo, hi] = priorSupport(vertex);
    let [total, cc, cs, ss] = [0, 0, 0, 0];
    for (let k = 0; k < NODES; k += 1) {
      const alpha = lo + ((hi - lo) * (k + 0.5)) / NODES;
      const weight = Math.exp(lnPriorDensity(vertex, alpha));
      total += weight;
      cc += weight * Math.cos(alpha) ** 2;
      cs += weight * Math.cos(alpha) * Math.sin(alpha);
      ss += weight * Math.sin(alpha) ** 2;
    }
    const scale = square / total;
    // A little of every direction, so that R can be inverted for a narrow prior.
    [cc, cs, ss] = [cc * scale + 1e-6 * square, cs * scale, ss * scale + 1e-6 * square];
    this.determinant = cc * ss - cs * cs;
    this.precision.set([ss / this.determinant, -cs / this.determinant, cc / this.determinant]);
    this.half = 0.5 * (cc + ss);
    this.roundness = this.determinant / this.half ** 2;
    this.probe = Float64Array.from(base);

    const one = angles.length === 1 && position[angles[0]] >= 0;
    const scalar = one ? scalarPriorOf(layout, angles[0]) : null;
    const [from, to] = scalar ? priorSupport(scalar) : [0, Math.PI / 2];
    const at = Float64Array.from(angles, (index) => base[index]);
    for (let cell = 0; cell < (one ? CELLS : 1); cell += 1) {
      if (one) at[0] = from + ((to - from) * (cell + 0.5)) / CELLS;
      this.weights.push(mixingWeights(at));
      this.cellPriors.push(
        one
          ? ((to - from) / CELLS) * Math.exp(scalar ? lnPriorDensity(scalar, at[0]) : logIsotropicDensity(at))
          : 1,
      );
    }
    this.terms = new Float64Array(this.weights.length);
    this.factors = new Float64Array(this.weights.length);
    this.first = new Float64Array(2 * layout.masses.length);
    this.second = new Float64Array(2 * layout.masses.length);
  }

  logEvidence(system: FieldSystem): number {
    const { probe, layout, weights, terms, factors, cellPriors, precision, half, roundness } = this;
    probe[layout.vertexAngle] = 0;
    this.first.set(this.units.of(system, probe));
    probe[layout.vertexAngle] = Math.PI / 2;
    this.second.set(this.units.of(system, probe));
    const fields = layout.masses.length;
    const { products } = this;
    this.multiply(system);
    let max = -Infinity;
    for (let cell = 0; cell < weights.length; cell += 1) {
      const w = weights[cell];
      let [xx, xy, yy, x, y] = [precision[0], precision[1], precision[2], 0, 0];
      let at = 0;
      for (let i = 0; i < fields; i += 1) {
        x += w[i] * products[at];
        y += w[i] * products[at + 1];
        at += 2;
        for (let j = 0; j <= i; j += 1) {
          const both = w[i] * w[j];
          xx += both * products[at];
          xy += both * products[at + 1];
          yy += both * products[at + 2];
          at += 3;
        }
      }
      const determinant = xx * yy - xy * xy;
      const a = (yy * x - xy * y) / determinant;
      const b = (xx * y - xy * x) / determinant;
      // Mean of |z|² under the conditional, in units in which R is round.
      const spread = (precision[0] * yy - 2 * precision[1] * xy + precision[2] * xx) / determinant;
      const size = half * (precision[0] * a * a + 2 * precision[1] * a * b + precision[2] * b * b + spread);
      terms[cell] = 0.5 * (x * a + y * b) + roundness * Math.min((0.5 * size) / half, 50);
      factors[cell] = cellPriors[cell] / Math.sqrt(determinant);
      factors[cell] *= size ** (-0.5 * roundness);
      if (terms[cell] > max) max = terms[cell];
    }
    let sum = 0;
    for (let cell = 0; cell < terms.length; cell += 1) sum += factors[cell] * Math.exp(terms[cell] - max);
    return system.model.logEvidence(-2 * (max + Math.log(sum)), Math.log(this.determinant));
  }

  private readonly products = new Float64Array(32);

  /** Products with the data and Gram entries of (X, Y), by field and by pair of fields, off-diagonal ones doubled. */
  private multiply(system: FieldSystem): void {
    const { first, second, products } = this;
    const { gram, linear, size: n } = system;
    let at = 0;
    for (let i = 0; i < this.layout.masses.length; i += 1) {
      const [ia, ib, ja, jb] = [first[2 * i], first[2 * i + 1], second[2 * i], second[2 * i + 1]];
      products[at] = ia * linear[2 * i] + ib * linear[2 * i + 1];
      products[at + 1] = ja * linear[2 * i] + jb * linear[2 * i + 1];
      at += 2;
      for (let j = 0; j <= i; j += 1) {
        const g = 2 * i * n + 2 * j;
        const [ka, kb, la, lb] = [first[2 * j], first[2 * j + 1], second[2 * j], second[2 * j + 1]];
        const [kc, ks] = [gram[g] * ka + gram[g + 1] * kb, gram[g + n] * ka + gram[g + n + 1] * kb];
        const [lc, ls] = [gram[g] * la + gram[g + 1] * lb, gram[g + n] * la + gram[g + n + 1] * lb];
        const twice = i === j ? 1 : 2;
        products[at] = twice * (ia * kc + ib * ks);
        products[at + 1] = 0.5 * twice * (ia * lc + ib * ls + ja * kc + jb * ks);
        products[at + 2] = twice * (ja * lc + jb * ls);
        at += 3;
      }
    }
  }
}
