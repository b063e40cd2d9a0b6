import type { Rng } from '@/lib/sampler';
import type { FieldMoments } from './field-moments';
import type { FieldSystem, MassEvidence } from './field-system';
import {
  CellDistribution,
  cellCentres,
  evenEdges,
  findCell,
  gatherEdges,
  temperedWeights,
} from './mass-grid';
import { massRange, type ParameterLayout } from './parameter-layout';
import { lnPriorDensity, priorCdf } from './priors';

/** How a jump chooses masses. `full` is the full parameter vector; `draw` changes sampled masses only. */
export interface MassProposal {
  draw(rng: Rng, full: Float64Array): void;
  /** ln density of the masses in `to`; `from` matters where only one mass is redrawn. */
  logDensity(to: Float64Array, from: Float64Array): number;
}

export interface MassProposalSettings {
  /** Exponent on the evidence: below 1 the proposal has heavier tails than what it stands in for. */
  temper: number;
  /** Part of the draws that come from the prior itself. */
  floor: number;
  /** Broader than the evidence: the cells of a grid gather where either is large. */
  explorer: MassEvidence | null;
}

/** No sampled mass: nothing to choose. */
export const noMasses: MassProposal = { draw: () => undefined, logDensity: () => 0 };

/** ln prior of all masses in order, fixed ones left out; −Infinity out of order or outside the supports. */
function lnMassPrior(layout: ParameterLayout, full: Float64Array): number {
  let sum = -layout.logOrderProbability;
  if (!layout.massOrder.holds((f) => full[layout.masses[f]])) return -Infinity;
  for (let f = 0; f < layout.masses.length; f += 1) {
    const x = full[layout.masses[f]];
    const prior = layout.massPriors[f];
    if (prior.kind !== 'fixed') sum += lnPriorDensity(prior, x);
  }
  return sum;
}

/** Prior probability of every cell of an axis. */
export function cellPriors(layout: ParameterLayout, field: number, edges: Float64Array): Float64Array {
  const prior = layout.massPriors[field];
  const out = new Float64Array(edges.length - 1);
  if (prior.kind === 'fixed') return out.fill(1);
  for (let i = 0; i < out.length; i += 1)
    out[i] = Math.max(0, priorCdf(prior, edges[i + 1]) - priorCdf(prior, edges[i]));
  return out;
}

/** Mixture of a piecewise-constant density with the prior of the masses. */
export class GridMixture implements MassProposal {
  private readonly drawn: Float64Array;

  constructor(
    private readonly layout: ParameterLayout,
    private readonly floor: number,
    private readonly drawCell: (rng: Rng, full: Float64Array) => void,
    private readonly cellDensity: (full: Float64Array) => number,
  ) {
    this.drawn = new Float64Array(layout.masses.length);
  }

  draw(rng: Rng, full: Float64Array): void {
    if (rng.uniform() >= this.floor) {
      this.drawCell(rng, full);
      return;
    }
    this.layout.massOrder.draw(rng, this.drawn);
    for (let f = 0; f < this.drawn.length; f += 1) full[this.layout.masses[f]] = this.drawn[f];
  }

  logDensity(to: Float64Array): number {
    const prior = Math.exp(lnMassPrior(this.layout, to));
    return Math.log((1 - this.floor) * this.cellDensity(to) + this.floor * prior);
  }
}

/** How many cells of equal width a first look at a range of masses needs: a tenth of a unit each, within 100 … 400. */
function firstCells(lo: number, hi: number): number {
  return Math.min(400, Math.max(100, Math.ceil((hi - lo) / 0.1)));
}

/** Exponents of the refinements: gentle at first, so that a peak between two centres is not overlooked. */
const REFINEMENTS = [0.2, 0.4, 0.7];
/** Cells of each axis of a refined plane, in those of the first look: only the last is drawn from. */
const PLANE_SCALES = [0.8, 0.8, 2];

/** How much of the proposal is the explorer's: it covers what is too narrow for the cells that the evidence asked for. */
const EXPLORED = 0.07;

/** Tempered weights of the evidence and of its explorer, if any, times `measure`, with these shares of the sum. */
export function combinedWeights(
  logValues: readonly Float64Array[],
  beta: number,
  explored: number,
  measure: Float64Array | null = null,
): Float64Array {
  const times = (values: Float64Array): Float64Array =>
    measure ? values.map((value, i) => value * measure[i]) : values;
  const weights = times(temperedWeights(logValues[0], beta));
  if (logValues.length < 2) return weights;
  const others = times(temperedWeights(logValues[1], beta));
  const sum = (values: Float64Array): number => values.reduce((total, value) => total + value, 0);
  const [own, foreign] = [(1 - explored) / sum(weights), explored / sum(others)];
  for (let i = 0; i < weights.length; i += 1) weights[i] = own * weights[i] + foreign * others[i];
  return weights;
}

/**
 * One sampled mass (others, if any, fixed): the tempered evidence on a grid of μ that is refined three times where the
 * evidence is large.
 */
export function lineProposal(
  layout: ParameterLayout,
  system: FieldSystem,
  stage: MassEvidence,
  field: number,
  { temper, floor, explorer }: MassProposalSettings,
): MassProposal {
  const full = Float64Array.from(layout.base);
  const index = layout.masses[field];
  const others = layout.masses.flatMap((_, f) => (f === field ? [] : [f]));
  const [lo, hi] = massRange(layout.massPriors[field]);
  const evidences = explorer ? [stage, explorer] : [stage];
  const evaluate = (edges: Float64Array): Float64Array[] =>
    evidences.map((evidence) =>
      cellCentres(edges).map((mass) => {
        full[index] = mass;
        system.load((f) => full[layout.masses[f]]);
        return evidence.logEvidence(system, full);
      }),
    );
  let edges = evenEdges(lo, hi, 2 * firstCells(lo, hi));
  for (const beta of REFINEMENTS) {
    edges = gatherEdges(edges, combinedWeights(evaluate(edges), beta, 0.5), 4 * firstCells(lo, hi));
  }
  const weights = combinedWeights(evaluate(edges), temper, EXPLORED, cellPriors(layout, field, edges));
  const cells = CellDistribution.of(weights);
  const grid = edges;
  // With other masses fixed, the order is left to the prior: a mass out of order is never accepted.
  const mixture = others.length === 0 ? floor : Math.max(floor, 1e-3);
  return new GridMixture(
    layout,
    mixture,
    (rng, to) => {
      const cell = cells.at(rng.uniform());
      to[index] = grid[cell] + (grid[cell + 1] - grid[cell]) * rng.uniform();
    },
    (to) => {
      const cell = findCell(grid, to[index]);
      return cell < 0 ? 0 : cells.probability(cell) / (grid[cell + 1] - grid[cell]);
    },
  );
}

/**
 * Two sampled masses: the tempered evidence on the plane, a tensor grid whose axes are refined three times where the
 * tempered marginals are large.
 */
export function planeProposal(
  layout: ParameterLayout,
  system: FieldSystem,
  stage: MassEvidence,
  [first, second]: readonly [number, number],
  { temper, floor, explorer }: MassProposalSettings,
): MassProposal {
  const full = Float64Array.from(layout.base);
  const [a, b] = [layout.masses[first], layout.masses[second]];
  const ranges = [massRange(layout.massPriors[first]), massRange(layout.massPriors[second])];

  const evidences = explorer ? [stage, explorer] : [stage];
  const evaluate = (x: Float64Array, y: Float64Array): Float64Array[] => {
    const xs = cellCentres(x);
    const ys = cellCentres(y);
    const values = evidences.map(() => new Float64Array(xs.length * ys.length).fill(-Infinity));
    const yMoments = Array.from(ys, (mass) => system.model.freshMoments(second, mass));
    system.load((f) => (f === first ? xs[0] : f === second ? ys[0] : full[layout.masses[f]]));
    for (let i = 0; i < xs.length; i += 1) {
      full[a] = xs[i];
      system.replace(first, system.model.moments(first, xs[i]));
      for (let j = 0; j < ys.length; j += 1) {
        // Only cells with some room for the order of the two masses.
        if (!layout.massOrder.hasRoom(first, [x[i], x[i + 1]], second, [y[j], y[j + 1]])) continue;
        full[b] = ys[j];
        system.replace(second, yMoments[j]);
        for (let k = 0; k < evidences.length; k += 1) {
          values[k][i * ys.length + j] = evidences[k].logEvidence(system, full);
        }
      }
    }
    return values;
  };

  const sizes = ranges.map(([lo, hi]) => firstCells(lo, hi));
  let x = evenEdges(...ranges[0], sizes[0]);
  let y = evenEdges(...ranges[1], sizes[1]);
  REFINEMENTS.forEach((beta, round) => {
    const columns = y.length - 1;
    const along = new Float64Array(x.length - 1);
    const across = new Float64Array(columns);
    const weights = combinedWeights(evaluate(x, y), beta, 0.5);
    for (let i = 0; i < along.length; i += 1) {
      for (let j = 0; j < columns; j += 1) {
        along[i] += weights[i * columns + j];
        across[j] += weights[i * columns + j];
      }
    }
    const scale = PLANE_SCALES[round];
    x = gatherEdges(x, along, Math.round(sizes[0] * scale));
    y = gatherEdges(y, across, Math.round(sizes[1] * scale));
  });

  const xPriors = cellPriors(layout, first, x);
  const yPriors = cellPriors(layout, second, y);
  const columns = yPriors.length;
  const measure = new Float64Array(xPriors.length * columns);
  for (let i = 0; i < xPriors.length; i += 1) {
    for (let j = 0; j < columns; j += 1) measure[i * columns + j] = xPriors[i] * yPriors[j];
  }
  const weights = combinedWeights(evaluate(x, y), temper, EXPLORED, measure);
  const cells = CellDistribution.of(weights);
  const [gridX, gridY] = [x, y];
  return new GridMixture(
    layout,
    floor,
    (rng, to) => {
      const cell = cells.at(rng.uniform());
      const i = Math.floor(cell / columns);
      const j = cell - i * columns;
      to[a] = gridX[i] + (gridX[i + 1] - gridX[i]) * rng.uniform();
      to[b] = gridY[j] + (gridY[j + 1] - gridY[j]) * rng.uniform();
    },
    (to) => {
      const i = findCell(gridX, to[a]);
      const j = findCell(gridY, to[b]);
      if (i < 0 || j < 0) return 0;
      const area = (gridX[i + 1] - gridX[i]) * (gridY[j + 1] - gridY[j]);
      return cells.probability(i * columns + j) / area;
    },
  );
}

/**
 * Three or more sampled masses: one of them, chosen at random, is redrawn from the tempered evidence given the others, on
 * a fixed grid of μ; then all are put in order. The others are the same before and after, so the density of the new mass
 * and that of going back are taken from the same grid of values.
 */
export class OneMassProposal implements MassProposal {
  private readonly free: number[];
  private readonly edges: Float64Array;
  private readonly nodes: FieldMoments[];
  private readonly centres: Float64Array;
  private readonly evenly: Float64Array;
  private readonly others: Float64Array;
  private readonly scratch: Float64Array;
  private readonly sorted: Float64Array;
  private readonly kept: { others: Float64Array; cells: CellDistribution | null };

  constructor(
    private readonly layout: ParameterLayout,
    private readonly system: FieldSystem,
    private readonly stage: MassEvidence,
    private readonly settings: MassProposalSettings,
    single: (edges: Float64Array) => Float64Array,
  ) {
    this.free = layout.masses.flatMap((index, f) => (layout.position[index] >= 0 ? [f] : []));
    const ranges = this.free.map((f) => massRange(layout.massPriors[f]));
    const lo = Math.min(...ranges.map(([from]) => from));
    const hi = Math.max(...ranges.map(([, to]) => to));
    let edges = evenEdges(lo, hi, 96);
    for (const beta of [0.1, 0.2]) edges = gatherEdges(edges, temperedWeights(single(edges), beta), 128);
    this.edges = edges;
    this.centres = cellCentres(edges);
    const last = layout.masses.length - 1;
    this.nodes = Array.from(this.centres, (mass) => system.model.freshMoments(last, mass));
    this.evenly = this.centres.map((_, i) => (edges[i + 1] - edges[i]) / (hi - lo));
    this.others = new Float64Array(last);
    this.scratch = Float64Array.from(layout.base);
    this.sorted = new Float64Array(this.free.length);
    this.kept = { others: new Float64Array(last).fill(NaN), cells: null };
  }

  draw(rng: Rng, full: Float64Array): void {
    const { masses } = this.layout;
    const chosen = this.free[Math.floor(rng.uniform() * this.free.length)];
    const cells = this.given(full, full[masses[chosen]]);
    const cell = cells.at(rng.uniform());
    full[masses[chosen]] = this.edges[cell] + (this.edges[cell + 1] - this.edges[cell]) * rng.uniform();
    for (let i = 0; i < this.free.length; i += 1) this.sorted[i] = full[masses[this.free[i]]];
    this.sorted.sort();
    for (let i = 0; i < this.free.length; i += 1) full[masses[this.free[i]]] = this.sorted[i];
  }

  logDensity(to: Float64Array, from: Float64Array): number {
    const { masses } = this.layout;
    let fresh = NaN;
    let changed = 0;
    for (const f of this.free) {
      const mass = to[masses[f]];
      if (this.free.some((g) => from[masses[g]] === mass)) continue;
      fresh = mass;
      changed += 1;
    }
    if (changed !== 1) return -Infinity;
    const cell = findCell(this.edges, fresh);
    if (cell < 0) return -Infinity;
    return Math.log(this.given(to, fresh).probability(cell) / (this.edges[cell + 1] - this.edges[cell]));
  }

  /** The distribution over cells of one mass given all the others in `full`, kept until the others change. */
  private given(full: Float64Array, left: number): CellDistribution {
    const { layout, others, scratch, kept } = this;
    const last = layout.masses.length - 1;
    let count = 0;
    let skipped = false;
    for (const index of layout.masses) {
      if (!skipped && full[index] === left) skipped = true;
      else if (count < last) others[count++] = full[index];
    }
    others.sort();
    if (kept.cells && kept.others.every((mass, i) => mass === others[i])) return kept.cells;

    for (let f = 0; f < last; f += 1) scratch[layout.masses[f]] = others[f];
    scratch[layout.masses[last]] = this.centres[0];
    this.system.load((f) => scratch[layout.masses[f]]);
    const logValues = this.centres.map((mass, i) => {
      scratch[layout.masses[last]] = mass;
      this.system.replace(last, this.nodes[i]);
      return this.stage.logEvidence(this.system, scratch);
    });
    const weights = temperedWeights(logValues, this.settings.temper);
    let total = 0;
    for (let i = 0; i < weights.length; i += 1) {
      weights[i] *= this.evenly[i];
      total += weights[i];
    }
    const { floor } = this.settings;
    for (let i = 0; i < weights.length; i += 1)
      weights[i] = (1 - floor) * (weights[i] / total) + floor * this.evenly[i];
    kept.cells = CellDistribution.of(weights);
    kept.others.set(others);
    return kept.cells;
  }
}
