import type { Rng } from '@/lib/sampler';
import { CellDistribution, evenEdges, findCell, gatherEdgesInto } from './mass-grid';

/**
 * A density of one number on [lo, hi], piecewise constant: a function is looked at in the middle of `even` cells of equal
 * width, then of as many cells as those again that gather where it is large. Nothing is allocated after construction.
 */
export class GridDensity {
  private readonly even: Float64Array;
  private readonly edges: Float64Array;
  private readonly values: Float64Array;
  private readonly evenValues: Float64Array;
  private readonly spread: Float64Array;
  private readonly cells: CellDistribution;
  private count = 0;

  constructor(lo: number, hi: number, even: number) {
    this.even = evenEdges(lo, hi, even);
    this.edges = new Float64Array(2 * even + 1);
    this.values = new Float64Array(2 * even);
    this.evenValues = this.values.subarray(0, even);
    this.spread = new Float64Array(2 * even);
    this.cells = new CellDistribution(2 * even);
  }

  /**
   * Lays the grid for exp(`lnDensity`), up to a factor; −Infinity is allowed, but not everywhere. Returns the ln of its
   * integral by the midpoints of the cells.
   */
  lay(lnDensity: (x: number) => number): number {
    const { even, edges, values, spread, cells } = this;
    const first = even.length - 1;
    this.fill(even, first, lnDensity);
    this.count = gatherEdgesInto(even, this.evenValues, 2 * first, edges, spread);
    const max = this.fill(edges, this.count - 1, lnDensity);
    for (let i = 0; i < this.count - 1; i += 1) values[i] *= edges[i + 1] - edges[i];
    cells.set(values, this.count - 1);
    return max + Math.log(cells.sum);
  }

  draw(rng: Rng): number {
    const cell = this.cells.at(rng.uniform());
    return this.edges[cell] + (this.edges[cell + 1] - this.edges[cell]) * rng.uniform();
  }

  /** Density at x, 0 outside. */
  density(x: number): number {
    const cell = findCell(this.edges, x, this.count);
    return cell < 0 ? 0 : this.cells.probability(cell) / (this.edges[cell + 1] - this.edges[cell]);
  }

  /** exp(f − max) at the middle of the first `count` cells, into `values`; returns the largest f. */
  private fill(edges: Float64Array, count: number, lnDensity: (x: number) => number): number {
    const { values } = this;
    let max = -Infinity;
    for (let i = 0; i < count; i += 1) {
      values[i] = lnDensity(0.5 * (edges[i] + edges[i + 1]));
      if (values[i] > max) max = values[i];
    }
    for (let i = 0; i < count; i += 1) values[i] = Math.exp(values[i] - max);
    return max;
  }
}
