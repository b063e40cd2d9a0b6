import { quantileOfSorted } from './quantiles';

/** One axis of a density's grid: `cells` cells from `lo` to `hi`, in the parameter's unit. */
export interface GridAxis {
  lo: number;
  hi: number;
  cells: number;
  /** Standard deviation of the smoothing kernel, in cells. */
  bandwidth: number;
  /** True where draws stand up against that end, so that smoothing is reflected there instead of leaking out. */
  wallLo: boolean;
  wallHi: boolean;
}

/** Share of draws in the outermost fiftieth of their span from which on that end counts as a wall. */
const wallShare = 0.005;

/** Kernels are cut here, in standard deviations. */
const kernelReach = 4;

/**
 * Chooses a grid for the density of some draws: the range that holds all but the outermost 0.1 % at each end with room
 * around it, but ending at a wall exactly; bandwidth 0.9 min(sd, IQR/1.349) n^(−1/6), between 1 and 4 cells, so that
 * neither noise nor far-apart modes decide.
 *
 * @param sorted finite draws in rising order
 * @param cells cells of the axis, 96 unless told
 * @returns the axis; of width 1 around the value where all draws are equal or there are none
 * @see D. W. Scott, Multivariate Density Estimation (1992), §6.3
 */
export function gridAxis(sorted: Float64Array, cells = 96): GridAxis {
  const n = sorted.length;
  const first = n ? sorted[0] : 0;
  const last = n ? sorted[n - 1] : 0;
  if (!(last > first))
    return { lo: first - 0.5, hi: first + 0.5, cells, bandwidth: 1, wallLo: false, wallHi: false };
  const margin = (last - first) / 50;
  const wallLo = countBelow(sorted, first + margin) > wallShare * n;
  const wallHi = n - countBelow(sorted, last - margin) > wallShare * n;
  const inner = [quantileOfSorted(sorted, 0.001), quantileOfSorted(sorted, 0.999)];
  const room = 0.05 * (inner[1] - inner[0]);
  const lo = wallLo ? first : Math.max(first - room, inner[0] - room);
  const hi = wallHi ? last : Math.min(last + room, inner[1] + room);
  const iqr = quantileOfSorted(sorted, 0.75) - quantileOfSorted(sorted, 0.25);
  const sd = standardDeviation(sorted);
  const spread = iqr > 0 ? Math.min(sd, iqr / 1.349) : sd;
  const wished = (0.9 * spread * n ** (-1 / 6) * cells) / (hi - lo);
  return { lo, hi, cells, bandwidth: Math.min(4, Math.max(1, wished)), wallLo, wallHi };
}

function countBelow(sorted: Float64Array, value: number): number {
  let lo = 0;
  let hi = sorted.length;
  while (lo < hi) {
    const mid = (lo + hi) >> 1;
    if (sorted[mid] < value) lo = mid + 1;
    else hi = mid;
  }
  return lo;
}

function standardDeviation(values: Float64Array): number {
  let mean = 0;
  let m2 = 0;
  for (let i = 0; i < values.length; i++) {
    const d = values[i] - mean;
    mean += d / (i + 1);
    m2 += d * (values[i] - mean);
  }
  return Math.sqrt(m2 / Math.max(1, values.length - 1));
}

/** Weights of a normal kernel at whole cells, cut at four standard deviations and normalised. */
function kernel(bandwidth: number): Float64Array {
  const reach = Math.ceil(kernelReach * bandwidth);
  const weights = new Float64Array(2 * reach + 1);
  let sum = 0;
  for (let i = -reach; i <= reach; i++) {
    const w = Math.exp(-0.5 * (i / bandwidth) ** 2);
    weights[i + reach] = w;
    sum += w;
  }
  return weights.map((w) => w / sum);
}

/** Smooths `length` values that lie `stride` apart in `from` into `to`; what leaves at a wall comes back. */
function smooth(
  from: Float64Array,
  to: Float64Array,
  offset: number,
  stride: number,
  axis: GridAxis,
  weights: Float64Array,
): void {
  const reach = (weights.length - 1) / 2;
  const n = axis.cells;
  for (let i = 0; i < n; i++) {
    const mass = from[offset + i * stride];
    if (mass === 0) continue;
    for (let k = -reach; k <= reach; k++) {
      let j = i + k;
      if (j < 0) {
        if (!axis.wallLo) continue;
        j = -1 - j;
      } else if (j >= n) {
        if (!axis.wallHi) continue;
        j = 2 * n - 1 - j;
      }
      if (j >= 0 && j < n) to[offset + j * stride] += mass * weights[k + reach];
    }
  }
}

/**
 * Smoothed density of draws on a grid: counts in cells, convolved with a normal kernel.
 *
 * @param draws finite or not; those outside the grid are passed over
 * @returns `axis.cells` values, density in 1/unit of the parameter; the sum times the cell width is the share of draws
 *   inside (less what the kernel carries over an end that is no wall)
 */
export function density1d(draws: ArrayLike<number>, axis: GridAxis): Float64Array {
  const counts = new Float64Array(axis.cells);
  const perUnit = axis.cells / (axis.hi - axis.lo);
  for (let i = 0; i < draws.length; i++) {
    const c = cellOf(draws[i], axis, perUnit);
    if (c >= 0) counts[c]++;
  }
  const out = new Float64Array(axis.cells);
  smooth(counts, out, 0, 1, axis, kernel(axis.bandwidth));
  return out.map((v) => (v * perUnit) / draws.length);
}

function cellOf(value: number, axis: GridAxis, perUnit: number): number {
  const c = Math.floor((value - axis.lo) * perUnit);
  if (c === axis.cells && value <= axis.hi) return axis.cells - 1;
  return c >= 0 && c < axis.cells ? c : -1;
}

/**
 * Smoothed joint density of pairs of draws, by counts in cells and a separable normal kernel.
 *
 * @param x draws; `y` draws of the same length
 * @returns ax.cells × ay.cells values, x running fastest: index = iy · ax.cells + ix; in draws a cell
 */
export function density2d(
  x: ArrayLike<number>,
  y: ArrayLike<number>,
  ax: GridAxis,
  ay: GridAxis,
): Float64Array {
  const counts = new Float64Array(ax.cells * ay.cells);
  const perX = ax.cells / (ax.hi - ax.lo);
  const perY = ay.cells / (ay.hi - ay.lo);
  for (let i = 0; i < x.length; i++) {
    const cx = cellOf(x[i], ax, perX);
    const cy = cellOf(y[i], ay, perY);
    if (cx >= 0 && cy >= 0) counts[cy * ax.cells + cx]++;
  }
  const along = new Float64Array(counts.length);
  const wx = kernel(ax.bandwidth);
  for (let row = 0; row < ay.cells; row++) smooth(counts, along, row * ax.cells, 1, ax, wx);
  const out = new Float64Array(counts.length);
  const wy = kernel(ay.bandwidth);
  for (let column = 0; column < ax.cells; column++) smooth(along, out, column, ax.cells, ay, wy);
  return out;
}

/**
 * The joint density at each draw, bilinear between the centres of cells (constant beyond the outermost centres).
 *
 * @returns one value a draw, in draws a cell; 0 for a draw outside the grid
 */
export function densityAtDraws(
  density: Float64Array,
  x: ArrayLike<number>,
  y: ArrayLike<number>,
  ax: GridAxis,
  ay: GridAxis,
): Float64Array {
  const out = new Float64Array(x.length);
  const perX = ax.cells / (ax.hi - ax.lo);
  const perY = ay.cells / (ay.hi - ay.lo);
  for (let i = 0; i < x.length; i++) {
    if (!(x[i] >= ax.lo && x[i] <= ax.hi && y[i] >= ay.lo && y[i] <= ay.hi)) continue;
    const u = Math.min(ax.cells - 1, Math.max(0, (x[i] - ax.lo) * perX - 0.5));
    const v = Math.min(ay.cells - 1, Math.max(0, (y[i] - ay.lo) * perY - 0.5));
    const iu = Math.min(ax.cells - 2, Math.floor(u));
    const iv = Math.min(ay.cells - 2, Math.floor(v));
    const fu = u - iu;
    const fv = v - iv;
    const at = iv * ax.cells + iu;
    const lower = density[at] * (1 - fu) + density[at + 1] * fu;
    const upper = density[at + ax.cells] * (1 - fu) + density[at + ax.cells + 1] * fu;
    out[i] = lower * (1 - fv) + upper * fv;
  }
  return out;
}
