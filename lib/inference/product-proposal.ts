import {
  cellCentres,
  CellDistribution,
  evenEdges,
  findCell,
  gatherEdges,
  temperedWeights,
} from './mass-grid';
import { cellPriors, GridMixture, type MassProposal, type MassProposalSettings } from './mass-proposal';
import { massRange, type ParameterLayout } from './parameter-layout';

/** First cells of an axis and those of its refinements. */
const CELLS = 128;
const REFINED = 160;
const REFINEMENTS = [0.2, 0.5];

/**
 * Three or more sampled masses of different kinds: each from a grid of its own, made of the tempered gain that its field
 * brings alone. Draws that come out of order are refused by the prior. It knows nothing of how the fields share the signal;
 * other moves do.
 */
export function productProposal(
  layout: ParameterLayout,
  sampled: readonly number[],
  gain: (field: number, mass: number) => number,
  { temper, floor }: Pick<MassProposalSettings, 'temper' | 'floor'>,
): MassProposal {
  const axes = sampled.map((field) => {
    const values = (edges: Float64Array): Float64Array => cellCentres(edges).map((mass) => gain(field, mass));
    let edges = evenEdges(...massRange(layout.massPriors[field]), CELLS);
    for (const beta of REFINEMENTS) edges = gatherEdges(edges, temperedWeights(values(edges), beta), REFINED);
    const priors = cellPriors(layout, field, edges);
    const weights = temperedWeights(values(edges), 0.5 * temper).map((weight, i) => weight * priors[i]);
    return { index: layout.masses[field], edges, cells: CellDistribution.of(weights) };
  });
  return new GridMixture(
    layout,
    Math.max(0.1, floor),
    (rng, to) => {
      for (const { index, edges, cells } of axes) {
        const cell = cells.at(rng.uniform());
        to[index] = edges[cell] + (edges[cell + 1] - edges[cell]) * rng.uniform();
      }
    },
    (to) => {
      let density = 1;
      for (const { index, edges, cells } of axes) {
        const cell = findCell(edges, to[index]);
        if (cell < 0) return 0;
        density *= cells.probability(cell) / (edges[cell + 1] - edges[cell]);
      }
      return density;
    },
  );
}
