/** Grids of cells that gather where a density is large; piecewise-constant densities on them. */

/** n cells of equal width between lo and hi: n + 1 edges. */
export function evenEdges(lo: number, hi: number, n: number): Float64Array {
  const edges = new Float64Array(n + 1);
  for (let i = 0; i <= n; i += 1) edges[i] = i === n ? hi : lo + ((hi - lo) * i) / n;
  return edges;
}

/** Of `size` cells along each of `dimensions` axes: those in the middle of every block of 3 × … × 3, row-major. */
export function middleCells(size: number, dimensions: number): Int32Array {
  const all = Int32Array.from({ length: size ** dimensions }, (_, cell) => cell);
  return all.filter((cell) => {
    for (let d = 0; d < dimensions; d += 1) if (Math.floor(cell / size ** d) % 3 !== 1) return false;
    return true;
  });
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
  const out = new Float64Array(n + 1);
  return out.slice(0, gatherEdgesInto(edges, weights, n, out, new Float64Array(weights.length)));
}

/**
 * `gatherEdges` without allocation: writes at most n + 1 edges into `out` and returns how many (edges closer together than
 * 1e-9 of the range are merged). `spread` is working space, one number a cell.
 */
export function gatherEdgesInto(
  edges: Float64Array,
  weights: Float64Array,
  n: number,
  out: Float64Array,
  spread: Float64Array,
): number {
  const cells = weights.length;
  let total = 0;
  for (let i = 0; i < cells; i += 1) {
    let largest = 0;
    for (let j = Math.max(0, i - 2); j <= Math.min(cells - 1, i + 2); j += 1) {
      if (weights[j] > largest) largest = weights[j];
    }
    spread[i] = largest;
    total += largest;
  }
  const lo = edges[0];
  const hi = edges[cells];
  const half = total > 0 ? Math.floor(n / 2) : 0;
  const even = n - half;
  const smallest = 1e-9 * (hi - lo);
  let count = 1;
  let sum = 0;
  let cell = 0;
  let nextEven = 1;
  let nextStep = 0;
  out[0] = lo;
  while (nextEven <= even || nextStep < half) {
    let step = Infinity;
    if (nextStep < half) {
      const goal = ((nextStep + 0.5) / half) * total;
      while (cell < cells - 1 && sum + spread[cell] < goal) {
        sum += spread[cell];
        cell += 1;
      }
      const part = spread[cell] > 0 ? Math.min(1, Math.max(0, (goal - sum) / spread[cell])) : 0.5;
      step = edges[cell] + part * (edges[cell + 1] - edges[cell]);
    }
    const evenly = nextEven <= even ? lo + ((hi - lo) * nextEven) / even : Infinity;
    const mark = Math.min(step, evenly, hi);
    if (step <= evenly) nextStep += 1;
    else nextEven += 1;
    if (mark - out[count - 1] > smallest) out[count++] = mark;
  }
  out[count - 1] = hi;
  return count;
}

/** The cell that holds x among the first `count` edges (all of them unless said), or −1 outside. */
export function findCell(edges: Float64Array, x: number, count = edges.length): number {
  let low = 0;
  let high = count - 1;
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
  private count = 0;
  private total = 0;

  constructor(capacity: number) {
    this.cumulative = new Float64Array(capacity);
  }

  /** A distribution of these weights, ≥ 0 and not all 0. */
  static of(weights: Float64Array): CellDistribution {
    const cells = new CellDistribution(weights.length);
    cells.set(weights, weights.length);
    return cells;
  }

  /** Takes the first `count` weights; no allocation. */
  set(weights: Float64Array, count: number): void {
    let sum = 0;
    for (let i = 0; i < count; i += 1) {
      sum += weights[i];
      this.cumulative[i] = sum;
    }
    this.count = count;
    this.total = sum;
  }

  /** The cell at which the distribution passes u ∈ (0, 1). */
  at(u: number): number {
    const goal = u * this.total;
    let low = -1;
    let high = this.count - 1;
    while (high - low > 1) {
      const middle = (low + high) >> 1;
      if (this.cumulative[middle] >= goal) high = middle;
      else low = middle;
    }
    return high;
  }

  /** Sum of the weights. */
  get sum(): number {
    return this.total;
  }

  /** Probability of a cell. */
  probability(cell: number): number {
    const before = cell > 0 ? this.cumulative[cell - 1] : 0;
    return (this.cumulative[cell] - before) / this.total;
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
