import { choleskyInto, forwardSolve } from '../cholesky';
import type { NullDraw } from './null-draws';

/** Part of a column's length below which what is left of it counts as nothing. */
const NOTHING = 1e-8;

/** Columns that a scan tries at each place of its grid: q arrays of length p, whitened by the real covariance. */
export type TrialColumns = readonly Float64Array[];

/**
 * The statistic of a scan on simulated nulls: at every place of the grid the fall of χ² when its columns join the background's.
 *
 * All columns together span few dimensions, in which everything is done: an orthonormal basis V, background first. With a known
 * covariance a null's noise is projected on V once and every place costs q products. With a drawn covariance S = L Lᵀ the
 * metric inside V is R with RᵀR = VᵀS⁻¹V; R is triangular, so the background stays what comes first and is left out by dropping it.
 */
export class NullStatistics {
  /** Dimensions that the background takes. */
  private readonly before: number;
  /** Dimensions left. */
  private readonly rest: number;
  private readonly basis: Float64Array[];
  /** Coordinates of every place's columns in the basis after the background's, q × rest. */
  private readonly coordinates: Float64Array[];
  private readonly orthonormal: Float64Array[];
  private readonly q: number;
  private readonly y: Float64Array;
  private readonly solved: Float64Array;
  private readonly turned: Float64Array;
  private readonly projection: Float64Array;
  private readonly r: Float64Array;
  private readonly upper: Float64Array;
  private readonly moved: Float64Array;
  /** χ² of the last null with the background alone, outside the basis too. */
  chiSquare = 0;

  constructor(
    background: readonly Float64Array[],
    private readonly places: readonly TrialColumns[],
  ) {
    this.basis = [];
    for (const column of background) this.extend(column);
    this.before = this.basis.length;
    for (const columns of places) for (const column of columns) this.extend(column);
    const r = this.basis.length;
    this.rest = r - this.before;
    this.q = Math.max(...places.map((columns) => columns.length));
    const { rest, basis, before } = this;
    this.coordinates = places.map((columns) => {
      const out = new Float64Array(columns.length * rest);
      columns.forEach((column, c) => {
        for (let k = 0; k < rest; k += 1) out[c * rest + k] = product(basis[before + k], column);
      });
      return out;
    });
    this.orthonormal = this.coordinates.map((columns) => orthonormalise(Float64Array.from(columns), rest));
    const p = basis[0].length;
    this.y = new Float64Array(rest);
    this.solved = new Float64Array(p);
    this.turned = new Float64Array(r * p);
    this.projection = new Float64Array(r);
    this.r = new Float64Array(r * r);
    this.upper = new Float64Array(rest * rest);
    this.moved = new Float64Array(this.q * rest);
  }

  get size(): number {
    return this.places.length;
  }

  get dimensions(): number {
    return this.rest;
  }

  /** Number of columns of a place. */
  get columns(): number {
    return this.q;
  }

  private extend(column: Float64Array): void {
    const { basis } = this;
    if (basis.length === column.length) return;
    const left = Float64Array.from(column);
    const length = Math.sqrt(product(column, column));
    if (!(length > 0)) return;
    for (let pass = 0; pass < 2; pass += 1) {
      for (const one of basis) {
        const part = product(one, left);
        for (let i = 0; i < left.length; i += 1) left[i] -= part * one[i];
      }
    }
    const size = Math.sqrt(product(left, left));
    if (!(size > NOTHING * length)) return;
    for (let i = 0; i < left.length; i += 1) left[i] /= size;
    basis.push(left);
  }

  /** Takes a null (or the data themselves, with no metric). */
  load({ noise, metric }: NullDraw): void {
    const { basis, before, rest, y, solved, turned, r, projection, upper } = this;
    const p = noise.length;
    if (!metric) {
      this.drawn = false;
      this.chiSquare = product(noise, noise);
      for (let k = 0; k < before; k += 1) this.chiSquare -= product(basis[k], noise) ** 2;
      for (let k = 0; k < rest; k += 1) y[k] = product(basis[before + k], noise);
      return;
    }
    this.drawn = true;
    const n = basis.length;
    solved.set(noise);
    forwardSolve(metric, p, solved);
    for (let k = 0; k < n; k += 1) {
      turned.set(basis[k], k * p);
      forwardSolve(metric, p, turned, k * p);
    }
    for (let i = 0; i < n; i += 1) {
      let along = 0;
      for (let k = 0; k < p; k += 1) along += turned[i * p + k] * solved[k];
      projection[i] = along;
      for (let j = 0; j <= i; j += 1) {
        let sum = 0;
        for (let k = 0; k < p; k += 1) sum += turned[i * p + k] * turned[j * p + k];
        r[i * n + j] = sum;
      }
    }
    choleskyInto(r, n, r);
    forwardSolve(r, n, projection);
    let left = product(solved, solved);
    for (let k = 0; k < before; k += 1) left -= projection[k] * projection[k];
    for (let k = 0; k < rest; k += 1) {
      y[k] = projection[before + k];
      for (let i = 0; i <= k; i += 1) upper[i * rest + k] = r[(before + k) * n + before + i];
    }
    this.chiSquare = left;
  }

  private drawn = false;

  /** Orthonormal columns of a place in the metric of the last null, q × dimensions; overwritten by the next call where drawn. */
  frame(place: number): Float64Array {
    if (!this.drawn) return this.orthonormal[place];
    return orthonormalise(this.raw(place), this.rest);
  }

  /** Columns of a place in the metric of the last null, as they are. */
  raw(place: number): Float64Array {
    const columns = this.coordinates[place];
    if (!this.drawn) return columns;
    const { rest, upper, moved } = this;
    const q = columns.length / rest;
    for (let c = 0; c < q; c += 1) {
      for (let i = 0; i < rest; i += 1) {
        let sum = 0;
        for (let k = i; k < rest; k += 1) sum += upper[i * rest + k] * columns[c * rest + k];
        moved[c * rest + i] = sum;
      }
    }
    return q === this.q ? moved : moved.subarray(0, q * rest);
  }

  /** The last null in the coordinates of `frame`. */
  get projected(): Float64Array {
    return this.y;
  }

  /** Fall of χ² at every place for the last null. */
  gains(out: Float64Array): void {
    const { rest, y } = this;
    for (let place = 0; place < this.places.length; place += 1) {
      const frame = this.frame(place);
      let gain = 0;
      for (let from = 0; from < frame.length; from += rest) {
        let sum = 0;
        for (let k = 0; k < rest; k += 1) sum += frame[from + k] * y[k];
        gain += sum * sum;
      }
      out[place] = gain;
    }
  }
}

/** Gram–Schmidt on the rows of length n, in place; a row that the ones before make up becomes 0. */
function orthonormalise(rows: Float64Array, n: number): Float64Array {
  for (let at = 0; at < rows.length; at += n) {
    let own = 0;
    for (let k = 0; k < n; k += 1) own += rows[at + k] * rows[at + k];
    for (let other = 0; other < at; other += n) {
      let part = 0;
      for (let k = 0; k < n; k += 1) part += rows[other + k] * rows[at + k];
      for (let k = 0; k < n; k += 1) rows[at + k] -= part * rows[other + k];
    }
    let left = 0;
    for (let k = 0; k < n; k += 1) left += rows[at + k] * rows[at + k];
    const factor = left > NOTHING * NOTHING * own ? 1 / Math.sqrt(left) : 0;
    for (let k = 0; k < n; k += 1) rows[at + k] *= factor;
  }
  return rows;
}

/** The largest of the values with a parabola through it and its neighbours, so that the grid's step hardly matters. */
export function peakOf(values: ArrayLike<number>): number {
  let top = 0;
  for (let i = 1; i < values.length; i += 1) if (values[i] > values[top]) top = i;
  const here = values[top];
  if (top === 0 || top === values.length - 1) return here;
  const [before, after] = [values[top - 1], values[top + 1]];
  const curvature = 2 * here - before - after;
  return curvature > 0 ? here + (after - before) ** 2 / (8 * curvature) : here;
}

function product(a: Float64Array, b: Float64Array): number {
  let sum = 0;
  for (let i = 0; i < a.length; i += 1) sum += a[i] * b[i];
  return sum;
}
