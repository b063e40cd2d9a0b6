import type { WhitenedField } from './whitened-field';
import type { WhitenedData } from './whitening';

/** Part of a vector's norm that may be lost: a hundredth of what interpolation may err. */
const LOST = 1e-12;
/** Columns of a table that the coordinates are chosen from at first; all are checked afterwards. */
const LOOKED_AT = 512;
/** Coordinates kept, as a part of the bins, above which it isn't worth it. */
const WORTH = 0.85;

/** Data, background and fields, whitened: vectors of one length, of which only sums of products matter. */
export interface WhitenedVectors {
  whitening: WhitenedData;
  fields: WhitenedField[];
  background: Float64Array;
}

/**
 * The same vectors in as few coordinates as hold them. Columns of a field whose frequency is bounded by μ_max span hardly more than
 * 2 + μ_max ln(κ_max/κ_min) · 2/π directions (a band of frequencies over a finite range of ln κ), often fewer than there are bins.
 * Orthonormal directions are taken by Gram–Schmidt, orthogonalised twice: the background's, then the data's, then those of the column that
 * is worst represented, until 1e-12 of none is left. Sums of squares and products, and so χ², are what they were. Vectors are returned as they are where columns can't be listed or little would be saved.
 */
export function compress(vectors: WhitenedVectors): WhitenedVectors {
  const { whitening, fields, background } = vectors;
  const p = whitening.length;
  const tables = new Set(fields.map(({ sample }) => sample));
  const rows: Float64Array[] = [];
  for (const table of tables) {
    if (!table) return vectors;
    const count = table.length / p;
    const stride = Math.ceil(count / LOOKED_AT) | 1;
    for (let k = 0; k < count; k += stride) rows.push(table.slice(k * p, (k + 1) * p));
  }
  const basis = new Basis(p, Math.floor(WORTH * p));
  for (let at = 0; at < background.length; at += p) basis.add(background.slice(at, at + p));
  basis.add(Float64Array.from(whitening.data));
  const first = basis.size;
  if (!basis.cover(rows)) return vectors;
  for (const table of tables) if (table && !basis.holds(table)) return vectors;
  return {
    whitening: {
      length: p,
      logDeterminant: whitening.logDeterminant,
      data: basis.coordinates(whitening.data, first),
    },
    fields: fields.map((field) => field.within((columns) => basis.coordinates(columns))),
    background: basis.coordinates(background, first),
  };
}

/**
 * How many leading coordinates hold data and background: all the others are zero. Few where `compress` chose the directions, since
 * theirs come first.
 */
export function reachOf(data: Float64Array, background: Float64Array): number {
  const p = data.length;
  let reach = p;
  while (reach > 0 && data[reach - 1] === 0 && background.every((x, i) => i % p !== reach - 1 || x === 0)) {
    reach -= 1;
  }
  return reach;
}

/** Orthonormal directions in p dimensions, at most `most` of them. */
class Basis {
  private readonly directions: Float64Array[] = [];

  constructor(
    private readonly p: number,
    private readonly most: number,
  ) {}

  /** Adds the direction of a vector (which is overwritten), unless it is held already. */
  add(vector: Float64Array): void {
    const { p, directions } = this;
    const before = norm(vector, 0, p);
    for (let round = 0; round < 2; round += 1) for (const direction of directions) take(vector, 0, direction);
    const left = norm(vector, 0, p);
    if (left > LOST * before) directions.push(vector.map((value) => value / left));
  }

  /** Adds directions until all rows are held; false if that takes too many. The rows are overwritten. */
  cover(rows: readonly Float64Array[]): boolean {
    const { p, directions, most } = this;
    for (const row of rows) {
      const size = norm(row, 0, p);
      if (size > 0) for (let i = 0; i < p; i += 1) row[i] /= size;
      for (const direction of directions) take(row, 0, direction);
    }
    for (;;) {
      let worst = 0;
      let largest = -1;
      rows.forEach((row, k) => {
        const left = norm(row, 0, p);
        if (left > largest) [worst, largest] = [k, left];
      });
      if (largest <= LOST) return directions.length <= most;
      if (directions.length >= most) return false;
      this.addRest(rows[worst].slice());
      const newest = directions[directions.length - 1];
      for (const row of rows) take(row, 0, newest);
    }
  }

  /** Adds what is left of a row, orthogonalised again, since it may be small. */
  private addRest(rest: Float64Array): void {
    for (const direction of this.directions) take(rest, 0, direction);
    const left = norm(rest, 0, this.p);
    this.directions.push(rest.map((value) => value / left));
  }

  /** Whether every vector of a table is held to the tolerance, or twice it for rounding. */
  holds(table: Float64Array): boolean {
    const { p, directions } = this;
    const rest = new Float64Array(p);
    for (let at = 0; at < table.length; at += p) {
      for (let i = 0; i < p; i += 1) rest[i] = table[at + i];
      const before = norm(rest, 0, p);
      for (const direction of directions) take(rest, 0, direction);
      if (norm(rest, 0, p) > 2 * LOST * before) return false;
    }
    return true;
  }

  /** Coordinates of vectors of length p that stand one after the other, of which the first `held` directions hold everything. */
  coordinates(vectors: Float64Array, held = this.size): Float64Array {
    const { p, directions, size } = this;
    const count = vectors.length / p;
    const out = new Float64Array(count * size);
    for (let k = 0; k < count; k += 1) {
      for (let j = 0; j < held; j += 1) out[k * size + j] = product(vectors, k * p, directions[j]);
    }
    return out;
  }

  get size(): number {
    return this.directions.length;
  }
}

function product(vector: Float64Array, from: number, direction: Float64Array): number {
  let even = 0;
  let odd = 0;
  const p = direction.length;
  for (let i = 1; i < p; i += 2) {
    even += vector[from + i - 1] * direction[i - 1];
    odd += vector[from + i] * direction[i];
  }
  return p % 2 === 1 ? even + odd + vector[from + p - 1] * direction[p - 1] : even + odd;
}

/** Takes a direction out of a vector, in place. */
function take(vector: Float64Array, from: number, direction: Float64Array): void {
  const part = product(vector, from, direction);
  for (let i = 0; i < direction.length; i += 1) vector[from + i] -= part * direction[i];
}

function norm(vector: Float64Array, from: number, p: number): number {
  let sum = 0;
  for (let i = 0; i < p; i += 1) sum += vector[from + i] * vector[from + i];
  return Math.sqrt(sum);
}
