/** Grids of cells that gather where a density is large; piecewise-constant densities on them. */

/** n cells of equal width between lo and hi: n + 1 edges. */
export function evenEdges(lo: number, hi: number, n: number): Float64Array {
  const edges = new Float64Array(n + 1);
  for (let i = 0; i <= n; i += 1) edges[i] = i === n ? hi : lo + ((hi - lo) * i) / n;
  return edges;
}

/** Middles of the cells. */
export function cellCentres(edges: Float64Array): Float64Array {
  const centres = new Float64Array(edges.length - 1);
  for (let i = 0; i < centres.length; i += 1) centres[i] = 0.5 * (edges[i] + edges[i + 1]);
  return centres;
}

/**
 * Edges of n cells between the ends of `edges`: half of them even, half at equal steps of the distribution with `weights`
 * (one a cell, ≥ 0). Each weight first spreads to the two cells on either side, so that a peak narrower than a cell is not lost
 * when the next grid resolves it.
 */
export function gatherEdges(edges: Float64Array, weights: Float64Array, n: number): Float64Array {
  const cells = weights.length;
  const spread = new Float64Array(cells);
  let total = 0;
  for (let i = 0; i < cells; i += 1) {
    for (let j = Math.max(0, i - 2); j <= Math.min(cells - 1, i + 2); j += 1)
      spread[i] = Math.max(spread[i], weights[j]);
    total += spread[i];
  }
  const lo = edges[0];
  const hi = edges[cells];
  const half = Math.floor(n / 2);
  const marks = Array.from(evenEdges(lo, hi, n - half));
  if (total > 0) {
    let sum = 0;
    let cell = 0;
    for (let k = 0; k < half; k += 1) {
      const goal = ((k + 0.5) / half) * total;
      while (cell < cells - 1 && sum + spread[cell] < goal) {
        sum += spread[cell];
        cell += 1;
      }
      const part = spread[cell] > 0 ? (goal - sum) / spread[cell] : 0.5;
      marks.push(edges[cell] + Math.min(1, Math.max(0, part)) * (edges[cell + 1] - edges[cell]));
    }
  }
  marks.sort((a, b) => a - b);
  const smallest = 1e-9 * (hi - lo);
  const kept = marks.filter((mark, i) => i === 0 || mark - marks[i - 1] > smallest);
  kept[kept.length - 1] = hi;
  return Float64Array.from(kept);
}

/** The cell that holds x, or −1 outside the edges. */
export function findCell(edges: Float64Array, x: number): number {
  let low = 0;
  let high = edges.length - 1;
  if (!(x >= edges[0] && x <= edges[high])) return -1;
  while (high - low > 1) {
    const middle = (low + high) >> 1;
    if (edges[middle] <= x) low = middle;
    else high = middle;
  }
  return low;
}

/** A discrete distribution: cumulative sums of weights, for draws by bisection. */
export class CellDistribution {
  private readonly cumulative: Float64Array;
  readonly total: number;

  /** `weights` ≥ 0, not all 0. */
  constructor(weights: Float64Array) {
    this.cumulative = new Float64Array(weights.length);
    let sum = 0;
    for (let i = 0; i < weights.length; i += 1) {
      sum += weights[i];
      this.cumulative[i] = sum;
    }
    this.total = sum;
  }

  /** The cell at which the distribution passes u ∈ (0, 1). */
  at(u: number): number {
    const goal = u * this.total;
    let low = -1;
    let high = this.cumulative.length - 1;
    while (high - low > 1) {
      const middle = (low + high) >> 1;
      if (this.cumulative[middle] >= goal) high = middle;
      else low = middle;
    }
    return high;
  }

  /** ln probability of a cell; −Infinity for an empty one. */
  logProbability(cell: number): number {
    const before = cell > 0 ? this.cumulative[cell - 1] : 0;
    return Math.log((this.cumulative[cell] - before) / this.total);
  }
}

/** exp(β (ln f − max)) of every entry; entries that aren't finite give 0. */
export function temperedWeights(logValues: Float64Array, beta: number): Float64Array {
  let max = -Infinity;
  for (const value of logValues) if (value > max && value < Infinity) max = value;
  const weights = new Float64Array(logValues.length);
  for (let i = 0; i < weights.length; i += 1) {
    const weight = Math.exp(beta * (logValues[i] - max));
    weights[i] = Number.isFinite(weight) ? weight : 0;
  }
  return weights;
}
