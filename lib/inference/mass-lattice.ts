import type { Rng } from '@/lib/sampler';
import type { FieldSystem, MassEvidence } from './field-system';
import { CellDistribution, cellCentres, evenEdges, findCell, gatherEdges } from './mass-grid';
import {
  cellPriors,
  combinedWeights,
  GridMixture,
  type MassProposal,
  type MassProposalSettings,
} from './mass-proposal';
import { massRange, type ParameterLayout } from './parameter-layout';

/** Cells of each axis: at the first look and after each refinement; the last are drawn from. */
const SIZES = [36, 36, 40, 72];
/** Exponents of the refinements. */
const REFINEMENTS = [0.2, 0.4, 0.7];
/** How far below its neighbour a cell may stay, in ln. */
const FALL = 1.5;
/** How much of the proposal is the explorer's. */
const EXPLORED = 0.1;
/** Tempering beside that of the settings where there is an explorer: the lattice's cells are wide for narrow ridges. */
const EXTRA_TEMPER = 0.7;

/**
 * Three sampled masses: the tempered evidence on a lattice of all of them (only cells with room for the order of the
 * masses), whose axes are refined three times where the tempered marginals are large. The new masses don't hang on the old.
 */
export function latticeProposal(
  layout: ParameterLayout,
  system: FieldSystem,
  stage: MassEvidence,
  sampled: readonly number[],
  { temper, floor, explorer }: MassProposalSettings,
): MassProposal {
  const depth = sampled.length;
  const full = Float64Array.from(layout.base);
  const indices = sampled.map((f) => layout.masses[f]);
  const ranges = sampled.map((f) => massRange(layout.massPriors[f]));
  const evidences = explorer ? [stage, explorer] : [stage];

  /** Calls `visit` for every cell with room for the order; the cell of each axis stands in `at`. */
  const at = new Int32Array(depth);
  const visitCells = (
    axes: readonly Float64Array[],
    enter: (d: number) => void,
    visit: (cell: number) => void,
  ) => {
    const walk = (d: number, before: number): void => {
      const edges = axes[d];
      for (let i = 0; i < edges.length - 1; i += 1) {
        if (d > 0 && axes[d - 1][at[d - 1]] >= edges[i + 1]) continue;
        at[d] = i;
        enter(d);
        const cell = before * (edges.length - 1) + i;
        if (d === depth - 1) visit(cell);
        else walk(d + 1, cell);
      }
    };
    walk(0, 0);
  };

  const evaluate = (axes: readonly Float64Array[]): Float64Array[] => {
    const count = axes.reduce((product, edges) => product * (edges.length - 1), 1);
    const values = evidences.map(() => new Float64Array(count).fill(-Infinity));
    const centres = axes.map(cellCentres);
    const moments = centres.map((masses, d) =>
      Array.from(masses, (mass) => system.model.freshMoments(sampled[d], mass)),
    );
    indices.forEach((index, d) => (full[index] = centres[d][0]));
    system.load((f) => full[layout.masses[f]]);
    visitCells(
      axes,
      (d) => {
        full[indices[d]] = centres[d][at[d]];
        system.replace(sampled[d], moments[d][at[d]]);
      },
      (cell) => {
        for (let k = 0; k < evidences.length; k += 1)
          values[k][cell] = evidences[k].logEvidence(system, full);
      },
    );
    return values;
  };

  let axes = ranges.map(([lo, hi]) => evenEdges(lo, hi, SIZES[0]));
  REFINEMENTS.forEach((beta, round) => {
    const weights = combinedWeights(evaluate(axes), beta, 0.5);
    const marginals = axes.map((edges) => new Float64Array(edges.length - 1));
    visitCells(
      axes,
      () => undefined,
      (cell) => {
        for (let d = 0; d < depth; d += 1) marginals[d][at[d]] += weights[cell];
      },
    );
    axes = axes.map((edges, d) => gatherEdges(edges, marginals[d], SIZES[round + 1]));
  });

  const priors = axes.map((edges, d) => cellPriors(layout, sampled[d], edges));
  const logValues = explorer ? evaluate(axes).map((values) => spread(values, axes)) : evaluate(axes);
  const measure = new Float64Array(logValues[0].length);
  visitCells(
    axes,
    () => undefined,
    (cell) => {
      measure[cell] = priors.reduce((product, prior, d) => product * prior[at[d]], 1);
    },
  );
  const cells = CellDistribution.of(
    combinedWeights(logValues, explorer ? EXTRA_TEMPER * temper : temper, EXPLORED, measure),
  );
  const grid = axes;
  return new GridMixture(
    layout,
    floor,
    (rng: Rng, to) => {
      let cell = cells.at(rng.uniform());
      for (let d = depth - 1; d >= 0; d -= 1) {
        const size = grid[d].length - 1;
        const i = cell % size;
        cell = (cell - i) / size;
        to[indices[d]] = grid[d][i] + (grid[d][i + 1] - grid[d][i]) * rng.uniform();
      }
    },
    (to) => {
      let cell = 0;
      let volume = 1;
      for (let d = 0; d < depth; d += 1) {
        const i = findCell(grid[d], to[indices[d]]);
        if (i < 0) return 0;
        cell = cell * (grid[d].length - 1) + i;
        volume *= grid[d][i + 1] - grid[d][i];
      }
      return cells.probability(cell) / volume;
    },
  );
}

/**
 * Every value raised to its largest neighbour's along each axis less `FALL`: a ridge narrower than the cells may pass beside
 * their centres.
 */
function spread(values: Float64Array, axes: readonly Float64Array[]): Float64Array {
  const out = Float64Array.from(values);
  let stride = 1;
  for (let d = axes.length - 1; d >= 0; d -= 1) {
    const size = axes[d].length - 1;
    for (let cell = 0; cell < values.length; cell += 1) {
      const i = Math.floor(cell / stride) % size;
      if (i > 0) out[cell] = Math.max(out[cell], values[cell - stride] - FALL);
      if (i < size - 1) out[cell] = Math.max(out[cell], values[cell + stride] - FALL);
    }
    stride *= size;
  }
  return out;
}

/** Either of two ways to choose masses, each for half of the draws. */
export class EitherMassProposal implements MassProposal {
  constructor(
    private readonly first: MassProposal,
    private readonly second: MassProposal,
  ) {}

  draw(rng: Rng, full: Float64Array): void {
    if (rng.uniform() < 0.5) this.first.draw(rng, full);
    else this.second.draw(rng, full);
  }

  logDensity(to: Float64Array, from: Float64Array): number {
    const a = this.first.logDensity(to, from);
    const b = this.second.logDensity(to, from);
    const larger = Math.max(a, b);
    return larger === -Infinity
      ? larger
      : larger + Math.log(0.5 * (Math.exp(a - larger) + Math.exp(b - larger)));
  }
}
