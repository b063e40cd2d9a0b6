import type { FieldBlock } from '@/lib/templates';
import type { Whitening } from './whitening';

/**
 * The whitened columns of one field as functions of its mass μ: either a table over the range of the mass prior, read
 * by eight-point Lagrange interpolation, or exact evaluation.
 *
 * Columns oscillate like exp(iμ ln κ), so eight points a spacing h apart err by about (h x)⁸/900 relative to the column,
 * x = the largest |ln κ| (plus what the coefficients add). The first spacing comes from that; the error is then measured
 * between the nodes, and the spacing shrunk until it is below the tolerance. Eight points rather than six: a table of a third of the
 * nodes stays in the processor's nearer cache, which pays for the two more products.
 */
export interface WhitenedField {
  /** Number of columns. */
  readonly width: number;
  /**
   * The columns at this mass, one after the other (width × p numbers). The array belongs to a small store and is
   * overwritten by later calls at `STORE` other masses: read it at once. No allocation.
   */
  at(mass: number): Float64Array;
  /** Number of nodes of the table; 0 where columns are evaluated exactly. */
  readonly nodes: number;
  /** Largest measured ‖interpolated − exact‖ / ‖exact‖ of the block of columns; 0 for exact evaluation. */
  readonly error: number;
  /**
   * Vectors whose combinations hold the columns at every mass: the table, or the columns at a fixed mass. Null where columns are evaluated at
   * any mass.
   */
  readonly sample: Float64Array | null;
  /** The same columns, each (vectors of the old length, one after the other) as `apply` gives it; `apply` is linear. */
  within(apply: (vectors: Float64Array) => Float64Array): WhitenedField;
}

const POINTS = 8;
/** Recently used masses that each field keeps: enough for a point, its proposal and a few one-parameter moves. */
const STORE = 8;

export interface WhitenedFieldSettings {
  /** Relative error allowed; 1e-10. */
  tolerance?: number;
  /** Largest table in bytes; beyond it columns are evaluated exactly. 64 MB. */
  maxBytes?: number;
}

/** Builds the columns of one field for masses in [lo, hi] (lo = hi for a fixed mass: exact). */
export function buildWhitenedField(
  block: FieldBlock,
  whitening: Whitening,
  [lo, hi]: readonly [number, number],
  { tolerance = 1e-10, maxBytes = 64 * 2 ** 20 }: WhitenedFieldSettings = {},
): WhitenedField {
  const p = whitening.length;
  const stride = block.width * p;
  const scratch = Array.from({ length: block.width }, () => new Float64Array(p));
  const exact = (mass: number, out: Float64Array, offset: number): void => {
    block.fill(mass, scratch);
    for (let c = 0; c < block.width; c += 1) {
      out.set(scratch[c], offset + c * p);
      whitening.apply(out, offset + c * p);
    }
  };
  if (!(hi > lo)) return evaluated(block.width, stride, exact, lo);
  const exactOnly = (): WhitenedField => evaluated(block.width, stride, exact, null);

  let step = (tolerance * 900) ** (1 / POINTS) / turningRate(block, p, 0.5 * (lo + hi));
  for (let attempt = 0; attempt < 8; attempt += 1) {
    const nodes = Math.max(2 * POINTS, Math.ceil((hi - lo) / step) + 1);
    if (nodes * stride * 8 > maxBytes) return exactOnly();
    const spacing = (hi - lo) / (nodes - 1);
    const table = new Float64Array(nodes * stride);
    for (let n = 0; n < nodes; n += 1) exact(n === nodes - 1 ? hi : lo + n * spacing, table, n * stride);
    const error = measureError(exact, table, lo, spacing, nodes, stride);
    if (error <= tolerance) return tabulated(block.width, table, { lo, spacing, nodes, error });
    step = Math.min(spacing * 0.8, spacing * 0.9 * (tolerance / error) ** (1 / POINTS));
  }
  return exactOnly();
}

/**
 * How fast the columns turn with μ: the largest |Δ row| / |row| per unit of μ, which is the largest |ln κ| for a pair of
 * cosine and sine. It only sets where the search for the spacing starts.
 */
function turningRate(block: FieldBlock, p: number, mass: number): number {
  const step = 1e-4;
  const here = Array.from({ length: block.width }, () => new Float64Array(p));
  const there = Array.from({ length: block.width }, () => new Float64Array(p));
  block.fill(mass, here);
  block.fill(mass + step, there);
  let rate = 1;
  for (let i = 0; i < p; i += 1) {
    let moved = 0;
    let size = 0;
    for (let c = 0; c < block.width; c += 1) {
      moved += (there[c][i] - here[c][i]) ** 2;
      size += here[c][i] ** 2;
    }
    if (size > 0) rate = Math.max(rate, Math.min(50, Math.sqrt(moved / size) / step));
  }
  return rate;
}

/** Six-point Lagrange interpolation at position t (in spacings from the first node). */
function interpolate(table: Float64Array, nodes: number, stride: number, t: number, out: Float64Array): void {
  const first = Math.min(nodes - POINTS, Math.max(0, Math.floor(t) - 3));
  const u = t - first;
  const u1 = u - 1;
  const u2 = u - 2;
  const u3 = u - 3;
  const u4 = u - 4;
  const u5 = u - 5;
  const u6 = u - 6;
  const u7 = u - 7;
  // Products of the factors from either end.
  const [l2, l3] = [u * u1, u * u1 * u2];
  const [l4, r4] = [l3 * u3, u4 * u5 * u6 * u7];
  const [r3, r2] = [u5 * u6 * u7, u6 * u7];
  const w0 = (-u1 * u2 * u3 * r4) / 5040;
  const w1 = (u * u2 * u3 * r4) / 720;
  const w2 = (-l2 * u3 * r4) / 240;
  const w3 = (l3 * r4) / 144;
  const w4 = (-l4 * r3) / 144;
  const w5 = (l4 * u4 * r2) / 240;
  const w6 = (-l4 * u4 * u5 * u7) / 720;
  const w7 = (l4 * u4 * u5 * u6) / 5040;
  const a = first * stride;
  const b = a + stride;
  const c = b + stride;
  const d = c + stride;
  const e = d + stride;
  const f = e + stride;
  const g = f + stride;
  const h = g + stride;
  for (let j = 0; j < stride; j += 1) {
    out[j] =
      w0 * table[a + j] +
      w1 * table[b + j] +
      w2 * table[c + j] +
      w3 * table[d + j] +
      (w4 * table[e + j] + w5 * table[f + j] + w6 * table[g + j] + w7 * table[h + j]);
  }
}

/** Largest relative error between nodes: at the first and last four intervals and at 64 between, off centre too. */
function measureError(
  exact: Evaluation,
  table: Float64Array,
  lo: number,
  spacing: number,
  nodes: number,
  stride: number,
): number {
  const truth = new Float64Array(stride);
  const found = new Float64Array(stride);
  const intervals = new Set<number>([0, 1, 2, 3, nodes - 5, nodes - 4, nodes - 3, nodes - 2]);
  for (let i = 0; i < 64; i += 1) intervals.add(Math.floor(((i + 0.5) / 64) * (nodes - 1)));
  let worst = 0;
  for (const interval of intervals) {
    for (const part of [0.28, 0.5, 0.72]) {
      const mass = lo + (interval + part) * spacing;
      exact(mass, truth, 0);
      interpolate(table, nodes, stride, interval + part, found);
      let difference = 0;
      let norm = 0;
      for (let j = 0; j < stride; j += 1) {
        difference += (found[j] - truth[j]) ** 2;
        norm += truth[j] * truth[j];
      }
      worst = Math.max(worst, Math.sqrt(difference / norm));
    }
  }
  return worst;
}

/** Writes the columns at a mass into `out` from `offset` on. */
type Evaluation = (mass: number, out: Float64Array, offset: number) => void;

/** A field that is read from a table of its columns at masses `spacing` apart. */
function tabulated(
  width: number,
  table: Float64Array,
  at: { lo: number; spacing: number; nodes: number; error: number },
): WhitenedField {
  const { lo, spacing, nodes, error } = at;
  const stride = table.length / nodes;
  return {
    width,
    nodes,
    error,
    sample: table,
    at: withStore(stride, (mass, out) => interpolate(table, nodes, stride, (mass - lo) / spacing, out)),
    within: (apply) => tabulated(width, apply(table), at),
  };
}

/** A field whose columns are evaluated whenever they are asked for; `fixed` is its mass, if that is one. */
function evaluated(width: number, stride: number, exact: Evaluation, fixed: number | null): WhitenedField {
  const columnsAt = (mass: number): Float64Array => {
    const columns = new Float64Array(stride);
    exact(mass, columns, 0);
    return columns;
  };
  return {
    width,
    nodes: 0,
    error: 0,
    sample: fixed === null ? null : columnsAt(fixed),
    at: withStore(stride, (mass, out) => exact(mass, out, 0)),
    within(apply) {
      const size = apply(new Float64Array(stride)).length;
      return evaluated(width, size, (mass, out, offset) => out.set(apply(columnsAt(mass)), offset), fixed);
    },
  };
}

/** Keeps the columns of the last few masses, so that moves that leave a mass alone don't compute them again. */
function withStore(stride: number, read: (mass: number, out: Float64Array) => void): WhitenedField['at'] {
  const masses = new Float64Array(STORE).fill(NaN);
  const columns = Array.from({ length: STORE }, () => new Float64Array(stride));
  let next = 0;
  return (mass) => {
    for (let i = 0; i < STORE; i += 1) if (masses[i] === mass) return columns[i];
    const slot = next;
    next = (next + 1) % STORE;
    read(mass, columns[slot]);
    masses[slot] = mass;
    return columns[slot];
  };
}
