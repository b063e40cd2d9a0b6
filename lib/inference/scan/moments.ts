import type { Likelihood } from '../likelihoods';

/**
 * One measurement in its own metric: data and columns whitened (L⁻¹ x with C = L Lᵀ), so that χ² is a sum of squares. Several
 * blocks make a joint system: coefficients and masses are shared, noise is independent between blocks. Measurements with a
 * common covariance are one block, stacked.
 */
export interface CollapsedBlock {
  /** Whitened data, length p. */
  readonly data: Float64Array;
  readonly likelihood: Likelihood;
  /** Whitened columns of the shared fixed coefficients; null where this block doesn't know a coefficient. */
  readonly fixed: readonly (Float64Array | null)[];
  /** Number of raw columns of each field. */
  readonly widths: readonly number[];
  /** Writes the whitened raw columns of a field at a mass into `out` (width × p). */
  fill(field: number, mass: number, out: Float64Array): void;
}

/** Products of the columns of one block: fields' columns first, then the fixed ones. */
export interface Moments {
  /** Number of columns. */
  readonly size: number;
  /** XᵀX, size × size, both triangles. */
  readonly gram: Float64Array;
  /** Xᵀd. */
  readonly linear: Float64Array;
  /** dᵀd. */
  square: number;
}

export function newMoments(size: number): Moments {
  return { size, gram: new Float64Array(size * size), linear: new Float64Array(size), square: 0 };
}

/**
 * The whitened raw columns of one field at one mass, one array a block. Kept by the caller: on a plane each mass serves many
 * pairs.
 */
export type FieldColumns = readonly Float64Array[];

export function fieldColumns(blocks: readonly CollapsedBlock[], field: number, mass: number): FieldColumns {
  return blocks.map((block) => {
    const out = new Float64Array(block.widths[field] * block.data.length);
    block.fill(field, mass, out);
    return out;
  });
}

/** Computes the moments of a block with the columns of its fields in place; `which` is the block's number. */
export function fillMoments(
  block: CollapsedBlock,
  which: number,
  fields: readonly FieldColumns[],
  out: Moments,
): void {
  const p = block.data.length;
  const columns: [Float64Array, number][] = [];
  fields.forEach((field) => {
    const values = field[which];
    for (let at = 0; at < values.length; at += p) columns.push([values, at]);
  });
  const n = out.size;
  for (const column of block.fixed) columns.push([column ?? new Float64Array(p), 0]);
  if (columns.length !== n) throw new TypeError(`${columns.length} columns for moments of ${n}`);
  for (let i = 0; i < n; i += 1) {
    const [a, from] = columns[i];
    out.linear[i] = dot(a, from, block.data, 0, p);
    for (let j = 0; j <= i; j += 1) {
      const [b, at] = columns[j];
      const value = dot(a, from, b, at, p);
      out.gram[i * n + j] = value;
      out.gram[j * n + i] = value;
    }
  }
  out.square = dot(block.data, 0, block.data, 0, p);
}

/**
 * How coefficients make the fields' raw columns: column j of `matrix` (row-major, raw × count) is what coefficient j multiplies;
 * `offset` (raw) is what is there without any of them, or null.
 */
export interface Design {
  readonly raw: number;
  readonly count: number;
  readonly matrix: Float64Array;
  readonly offset: Float64Array | null;
}

/** Moments of the coefficients of a design: first its own, then the fixed columns'. `out.size` = count + fixed columns. */
export function applyDesign(raw: Moments, design: Design, out: Moments): void {
  const { raw: r, count, matrix, offset } = design;
  const n = raw.size;
  const k = n - r;
  const m = count + k;
  if (out.size !== m) throw new TypeError(`a design of ${m} coefficients for moments of ${out.size}`);
  const right = (i: number): number => {
    if (!offset) return raw.linear[i];
    let sum = raw.linear[i];
    for (let a = 0; a < r; a += 1) sum -= raw.gram[i * n + a] * offset[a];
    return sum;
  };
  for (let i = 0; i < count; i += 1) {
    let linear = 0;
    for (let a = 0; a < r; a += 1) {
      const factor = matrix[a * count + i];
      if (factor !== 0) linear += factor * right(a);
    }
    out.linear[i] = linear;
    for (let j = 0; j <= i; j += 1) {
      let sum = 0;
      for (let a = 0; a < r; a += 1) {
        const left = matrix[a * count + i];
        if (left === 0) continue;
        for (let b = 0; b < r; b += 1) sum += left * raw.gram[a * n + b] * matrix[b * count + j];
      }
      out.gram[i * m + j] = sum;
      out.gram[j * m + i] = sum;
    }
    for (let f = 0; f < k; f += 1) {
      let sum = 0;
      for (let a = 0; a < r; a += 1) sum += matrix[a * count + i] * raw.gram[a * n + r + f];
      out.gram[i * m + count + f] = sum;
      out.gram[(count + f) * m + i] = sum;
    }
  }
  for (let f = 0; f < k; f += 1) {
    out.linear[count + f] = right(r + f);
    for (let g = 0; g < k; g += 1) {
      out.gram[(count + f) * m + count + g] = raw.gram[(r + f) * n + r + g];
    }
  }
  out.square = raw.square;
  if (offset) {
    for (let a = 0; a < r; a += 1) out.square -= offset[a] * (raw.linear[a] + right(a));
  }
}

function dot(a: Float64Array, from: number, b: Float64Array, at: number, n: number): number {
  let sum = 0;
  for (let i = 0; i < n; i += 1) sum += a[from + i] * b[at + i];
  return sum;
}
