import { drawIsotropicAngles, logIsotropicDensity, mixingWeights } from '@/lib/templates';
import type { Rng } from '@/lib/sampler';
import type { FieldStage, FieldSystem } from './field-system';
import { findAnglePeak } from './angle-peak';
import { FieldUnits } from './field-units';
import {
  drawCoefficient,
  isExactReference,
  linearReference,
  lnCoefficientDensity,
  type LinearReference,
} from './linear-reference';
import { CellDistribution, evenEdges, findCell, gatherEdgesInto, middleCells } from './mass-grid';
import { scalarPriorOf, type ParameterLayout } from './parameter-layout';
import { drawFromPrior, lnPriorDensity, priorSupport } from './priors';

/** Cells of each sampled angle when so many are sampled. */
const CELLS: Readonly<Record<number, number>> = { 1: 63, 2: 18, 3: 9 };
/** Part of the angles that is drawn from their prior. */
const FLOOR = 0.1;
/** Nodes round the best angle. */
const PEAK_NODES = 12;
/** Exponents so far below the largest count for nothing. */
const NEGLIGIBLE = -40;

/**
 * Structure `mixed`: coefficients g w_i(angles) u_i(μ_i). The angles are drawn from a grid of their conditional with g and
 * the background integrated out (one angle: 64 cells, then 64 more gathered where it is large), mixed with a tenth of their
 * prior; g is then drawn from its conditional normal. Angles or g that are fixed are conditioned on, and so is the
 * vertex angle of a mixture.
 */
export class MixingStage implements FieldStage {
  readonly exact: boolean;
  private readonly units: FieldUnits;
  private readonly free: number[];
  private readonly reference: LinearReference | null;
  private readonly fields: number;
  /** Signal's Gram matrix and products with the data, a number for each (pair of) fields. */
  private readonly gram: Float64Array;
  private readonly linear: Float64Array;
  private readonly edges: Float64Array[];
  /** Of every cell's centre: the weights, the products w_i w_j (twice off the diagonal), and the prior density. */
  private readonly cellWeights: Float64Array;
  private readonly cellProducts: Float64Array;
  private readonly cellPriors: Float64Array;
  private readonly cellVolume: number;
  /** Of every cell: exponent of the gain, and what multiplies its exponential. */
  private readonly values: Float64Array;
  private readonly factors: Float64Array;
  private readonly packed: Float64Array;
  private readonly all: Int32Array;
  private readonly thirds: Int32Array;
  private readonly peak = { angle: 0, reach: 0 };
  private readonly peakValues = new Float64Array(PEAK_NODES);
  private readonly peakFactors = new Float64Array(PEAK_NODES);
  private readonly angleScratch: Float64Array;
  private readonly drawn: Float64Array;
  private readonly weights: Float64Array;
  private readonly gathered: Float64Array;
  private readonly spread: Float64Array;
  private readonly cells: CellDistribution;
  private edgeCount = 0;
  private laid = false;
  private readonly laidMasses: Float64Array;
  private laidVertexAngle = NaN;
  private readonly form = { precision: 0, linear: 0 };

  constructor(private readonly layout: ParameterLayout) {
    this.units = new FieldUnits(layout);
    this.fields = layout.masses.length;
    this.free = layout.angles.flatMap((index, k) => (layout.position[index] >= 0 ? [k] : []));
    const coupled = layout.priors[layout.coupling];
    this.reference = coupled.kind === 'fixed' ? null : linearReference(coupled);
    this.exact = [layout.coupling, ...layout.background].every((index) =>
      isExactReference(layout.priors[index]),
    );
    this.gram = new Float64Array(this.fields ** 2);
    this.linear = new Float64Array(this.fields);
    this.angleScratch = Float64Array.from(layout.angles, (index) => layout.base[index]);
    this.drawn = new Float64Array(layout.angles.length);
    this.weights = new Float64Array(this.fields);

    this.edges = this.free.map((k) => {
      const prior = scalarPriorOf(layout, layout.angles[k]);
      const [lo, hi] = prior ? priorSupport(prior) : [0, Math.PI / 2];
      return evenEdges(lo, hi, CELLS[this.free.length]);
    });
    const count = this.edges.reduce((product, edges) => product * (edges.length - 1), 1);
    this.all = Int32Array.from({ length: count }, (_, cell) => cell);
    this.thirds = middleCells(CELLS[this.free.length] ?? 1, this.free.length);
    const products = (this.fields * (this.fields + 1)) / 2;
    this.packed = new Float64Array(products);
    this.cellWeights = new Float64Array(count * this.fields);
    this.cellProducts = new Float64Array(count * products);
    this.cellPriors = new Float64Array(count);
    this.values = new Float64Array(count);
    this.factors = new Float64Array(count);
    this.gathered = new Float64Array(count + 1);
    this.spread = new Float64Array(count);
    this.cells = new CellDistribution(count);
    this.laidMasses = new Float64Array(this.fields).fill(NaN);
    for (let cell = 0; cell < count; cell += 1) this.tabulate(cell);
    this.cellVolume = this.edges.reduce((product, edges) => product * (edges[1] - edges[0]), 1);
  }

  /** The sum over every third cell of each angle, and over nodes round the best angle of two fields where those are too wide. */
  logEvidence(system: FieldSystem, full: Float64Array): number {
    this.settle(system, full);
    const { values, factors, cellPriors, thirds } = this;
    let max = this.gainAtCells(full, thirds);
    const half = this.free.length === 1 && this.fields === 2 ? this.findPeak(full) : 0;
    if (half > 0) max = Math.max(max, this.gainAtPeak(full, half));
    let sum = 0;
    for (let k = 0; k < thirds.length; k += 1) {
      const cell = thirds[k];
      const fall = values[cell] - max;
      if (fall < NEGLIGIBLE) continue;
      const part = half > 0 ? this.partBeyond(cell, half) : 1;
      sum += part * cellPriors[cell] * factors[cell] * Math.exp(fall);
    }
    sum *= 3 ** this.free.length * this.cellVolume;
    if (half > 0) {
      for (let k = 0; k < PEAK_NODES; k += 1) sum += this.peakFactors[k] * Math.exp(this.peakValues[k] - max);
    }
    return system.model.logEvidence(-2 * (max + Math.log(sum)), 0);
  }

  draw(rng: Rng, system: FieldSystem, full: Float64Array): void {
    this.settle(system, full);
    if (this.free.length > 0) this.drawAngles(rng, full);
    if (!this.reference) return;
    this.weigh(full);
    const { precision, linear } = this.conditional();
    full[this.layout.coupling] = drawCoefficient(rng, this.reference, precision, linear);
  }

  logDensity(system: FieldSystem, full: Float64Array): number {
    this.settle(system, full);
    let sum = this.free.length > 0 ? this.lnAngleDensity(full) : 0;
    if (this.reference) {
      this.weigh(full);
      const { precision, linear } = this.conditional();
      sum += lnCoefficientDensity(full[this.layout.coupling], this.reference, precision, linear);
    }
    return sum;
  }

  private drawAngles(rng: Rng, full: Float64Array): void {
    const { layout, free } = this;
    if (rng.uniform() < FLOOR) {
      if (layout.isotropic) drawIsotropicAngles(() => rng.uniform(), this.drawn);
      for (const k of free) {
        const prior = scalarPriorOf(layout, layout.angles[k]);
        full[layout.angles[k]] = prior ? drawFromPrior(prior, rng) : this.drawn[k];
      }
      return;
    }
    this.layAngles(full);
    const { edges, cells, edgeCount } = this;
    let cell = cells.at(rng.uniform());
    for (let d = free.length - 1; d >= 0; d -= 1) {
      const axis = free.length === 1 ? this.gathered : edges[d];
      const size = free.length === 1 ? edgeCount - 1 : axis.length - 1;
      const at = cell % size;
      cell = (cell - at) / size;
      full[layout.angles[free[d]]] = axis[at] + (axis[at + 1] - axis[at]) * rng.uniform();
    }
  }

  private lnAngleDensity(full: Float64Array): number {
    const { layout, free } = this;
    for (let k = 0; k < layout.angles.length; k += 1) this.drawn[k] = full[layout.angles[k]];
    const prior = Math.exp(this.lnAnglePrior(this.drawn));
    this.layAngles(full);
    let cell = 0;
    let volume = 1;
    for (let d = 0; d < free.length; d += 1) {
      const axis = free.length === 1 ? this.gathered : this.edges[d];
      const count = free.length === 1 ? this.edgeCount : axis.length;
      const at = findCell(axis, full[layout.angles[free[d]]], count);
      if (at < 0) return -Infinity;
      cell = cell * (count - 1) + at;
      volume *= axis[at + 1] - axis[at];
    }
    return Math.log(((1 - FLOOR) * this.cells.probability(cell)) / volume + FLOOR * prior);
  }

  /** Lays the grid of the angles at the settled masses: `cells`, on `edges`, or on `gathered` for one sampled angle. */
  private layAngles(full: Float64Array): void {
    if (this.laid) return;
    this.laid = true;
    const { values, factors, cellPriors, cells, gathered } = this;
    const count = values.length;
    const max = this.gainAtCells(full, this.all);
    for (let cell = 0; cell < count; cell += 1) {
      values[cell] = cellPriors[cell] * factors[cell] * Math.exp(values[cell] - max);
    }
    if (this.free.length > 1) {
      cells.set(values, count);
      return;
    }
    this.edgeCount = gatherEdgesInto(this.edges[0], values, count, gathered, this.spread);
    const [k] = this.free;
    let largest = -Infinity;
    for (let i = 0; i < this.edgeCount - 1; i += 1) {
      this.angleScratch[k] = 0.5 * (gathered[i] + gathered[i + 1]);
      mixingWeights(this.angleScratch, this.weights);
      values[i] = this.lnGain(this.weights, full) + this.lnAnglePrior(this.angleScratch);
      if (values[i] > largest) largest = values[i];
    }
    for (let i = 0; i < this.edgeCount - 1; i += 1) {
      values[i] = Math.exp(values[i] - largest) * (gathered[i + 1] - gathered[i]);
    }
    cells.set(values, this.edgeCount - 1);
  }

  /** The weights, their products and the prior density at the centre of a cell. */
  private tabulate(cell: number): void {
    const { fields, weights, cellProducts } = this;
    this.placeCentre(cell);
    mixingWeights(this.angleScratch, weights);
    this.cellWeights.set(weights, cell * fields);
    let at = cell * this.packed.length;
    for (let i = 0; i < fields; i += 1) {
      for (let j = 0; j <= i; j += 1) cellProducts[at++] = (i === j ? 1 : 2) * weights[i] * weights[j];
    }
    this.cellPriors[cell] = Math.exp(this.lnAnglePrior(this.angleScratch));
  }

  /**
   * The gain of `lnGain` at the centre of these cells as factor · exp(value), without logarithms; returns the largest
   * value.
   */
  private gainAtCells(full: Float64Array, at: Int32Array): number {
    const { fields, gram, linear, packed, values, factors, cellWeights, cellProducts, reference } = this;
    const products = packed.length;
    let next = 0;
    for (let i = 0; i < fields; i += 1) for (let j = 0; j <= i; j += 1) packed[next++] = gram[i * fields + j];
    const own = reference ? reference.precision : 0;
    const shift = reference ? own * reference.mean : 0;
    const offset = reference ? shift * reference.mean : 0;
    const g = full[this.layout.coupling];
    let max = -Infinity;
    for (let c = 0; c < at.length; c += 1) {
      const cell = at[c];
      let q = 0;
      let l = 0;
      for (let k = 0; k < products; k += 1) q += cellProducts[cell * products + k] * packed[k];
      for (let i = 0; i < fields; i += 1) l += cellWeights[cell * fields + i] * linear[i];
      let value: number;
      if (reference) {
        const total = q + own;
        const sum = l + shift;
        value = 0.5 * ((sum * sum) / total - offset);
        factors[cell] = Math.sqrt(own / total);
      } else {
        value = g * (l - 0.5 * q * g);
        factors[cell] = 1;
      }
      values[cell] = value;
      if (value > max) max = value;
    }
    return max;
  }

  /** Two fields: settles `peak`; returns its reach, or 0 where that is no less than the cells of the evidence. */
  private findPeak(full: Float64Array): number {
    const g = this.reference ? NaN : full[this.layout.coupling];
    if (!findAnglePeak(this.gram, this.linear, g, this.peak)) return 0;
    const [first, second] = this.edges[0];
    return this.peak.reach < 4.5 * (second - first) ? this.peak.reach : 0;
  }

  /** Gain and volume at nodes within `half` of the peak; returns the largest exponent. */
  private gainAtPeak(full: Float64Array, half: number): number {
    const { peakValues, peakFactors, angleScratch, free, edges } = this;
    const peak = this.peak.angle;
    const axis = edges[0];
    const lo = Math.max(axis[0], peak - half);
    const width = (Math.min(axis[axis.length - 1], peak + half) - lo) / PEAK_NODES;
    let max = -Infinity;
    for (let k = 0; k < PEAK_NODES; k += 1) {
      angleScratch[free[0]] = lo + (k + 0.5) * width;
      mixingWeights(angleScratch, this.weights);
      peakValues[k] = width > 0 ? this.lnGain(this.weights, full) : -Infinity;
      peakFactors[k] = width > 0 ? width * Math.exp(this.lnAnglePrior(angleScratch)) : 0;
      if (peakValues[k] > max) max = peakValues[k];
    }
    return max;
  }

  /** How much of the three cells round this one lies further than `half` from the peak. */
  private partBeyond(cell: number, half: number): number {
    const axis = this.edges[0];
    const lo = axis[cell - 1];
    const hi = axis[cell + 2];
    const overlap = Math.min(hi, this.peak.angle + half) - Math.max(lo, this.peak.angle - half);
    return 1 - Math.max(0, overlap) / (hi - lo);
  }

  /** ln prior density of the sampled angles, the isotropic one together. */
  private lnAnglePrior(angles: Float64Array): number {
    if (this.layout.isotropic) return logIsotropicDensity(angles);
    let sum = 0;
    for (const k of this.free) {
      const prior = scalarPriorOf(this.layout, this.layout.angles[k]);
      if (prior) sum += lnPriorDensity(prior, angles[k]);
    }
    return sum;
  }

  private placeCentre(cell: number): void {
    let rest = cell;
    for (let d = this.free.length - 1; d >= 0; d -= 1) {
      const edges = this.edges[d];
      const size = edges.length - 1;
      const at = rest % size;
      rest = (rest - at) / size;
      this.angleScratch[this.free[d]] = 0.5 * (edges[at] + edges[at + 1]);
    }
  }

  /** Weights of the angles in `full`. */
  private weigh(full: Float64Array): void {
    for (let k = 0; k < this.drawn.length; k += 1) this.drawn[k] = full[this.layout.angles[k]];
    mixingWeights(this.drawn, this.weights);
    this.project(this.weights);
  }

  /** Products of the fields' signals u_iᵀ(…)u_j at the masses of the system. */
  private settle(system: FieldSystem, full: Float64Array): void {
    const { fields, gram, linear, layout } = this;
    const u = this.units.of(system, full);
    const n = system.size;
    // The grid of the angles hangs on these products (and a fixed g, which never changes) alone.
    let same = true;
    for (let f = 0; f < fields; f += 1) {
      if (this.laidMasses[f] !== full[layout.masses[f]]) same = false;
      this.laidMasses[f] = full[layout.masses[f]];
    }
    const { vertexAngle } = layout;
    const angle = vertexAngle >= 0 ? full[vertexAngle] : 0;
    if (same && angle === this.laidVertexAngle) return;
    this.laidVertexAngle = angle;
    this.laid = false;
    for (let i = 0; i < fields; i += 1) {
      const ua = u[2 * i];
      const ub = u[2 * i + 1];
      linear[i] = ua * system.linear[2 * i] + ub * system.linear[2 * i + 1];
      for (let j = 0; j <= i; j += 1) {
        const at = 2 * i * n + 2 * j;
        const va = u[2 * j];
        const vb = u[2 * j + 1];
        const product =
          ua * (system.gram[at] * va + system.gram[at + 1] * vb) +
          ub * (system.gram[at + n] * va + system.gram[at + n + 1] * vb);
        gram[i * fields + j] = product;
        gram[j * fields + i] = product;
      }
    }
  }

  /** The quadratic form −½ q g² + l g of the coupling at these weights, into `form`. */
  private project(weights: Float64Array): void {
    const { fields, gram, linear, form } = this;
    let q = 0;
    let l = 0;
    for (let i = 0; i < fields; i += 1) {
      l += weights[i] * linear[i];
      for (let j = 0; j < fields; j += 1) q += weights[i] * weights[j] * gram[i * fields + j];
    }
    form.precision = q;
    form.linear = l;
  }

  /** Conditional of g with its reference: adds the prior to `form`. */
  private conditional(): { precision: number; linear: number } {
    const { form, reference } = this;
    if (reference) {
      form.precision += reference.precision;
      form.linear += reference.precision * reference.mean;
    }
    return form;
  }

  /** ln of the likelihood's gain over no signal at these weights, g integrated out (or at its fixed value). */
  private lnGain(weights: Float64Array, full: Float64Array): number {
    this.project(weights);
    const { form, reference } = this;
    if (!reference) {
      const g = full[this.layout.coupling];
      return g * (form.linear - 0.5 * form.precision * g);
    }
    const { precision, mean } = reference;
    const total = form.precision + precision;
    const shifted = form.linear + precision * mean;
    return 0.5 * ((shifted * shifted) / total - precision * mean * mean - Math.log(total / precision));
  }
}
