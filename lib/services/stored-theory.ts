import { permuteMatrix, type LinearColumn, type TheoryParts, type Window } from '@/lib/measurements';

/** What is stored before the numbers: how many there are, and what they are called. */
interface Head {
  /** Number of theory bins of the window, and whether it has edges; null without a window. */
  window: { size: number; edges: boolean } | null;
  columns: string[];
  covariance: boolean;
}

export const noTheory: TheoryParts = { window: null, columns: [], covariance: null };

/**
 * Window, columns and theory covariance as one column of bytes: the length of a head (32 bits, little-endian), the head as JSON, then
 * little-endian float64: the window row by row, its theory's κ or lower and upper edges, each column, the covariance. Null for none.
 */
export function writeTheory({ window, columns, covariance }: TheoryParts): Buffer | null {
  if (!window && columns.length === 0 && !covariance) return null;
  const head: Head = {
    window: window && { size: window.size, edges: window.lo !== null },
    columns: columns.map(({ name }) => name),
    covariance: covariance !== null,
  };
  const text = Buffer.from(JSON.stringify(head), 'utf8');
  const arrays = [
    ...(window ? [window.matrix, ...(window.lo && window.hi ? [window.lo, window.hi] : [window.kappa])] : []),
    ...columns.map(({ values }) => values),
    ...(covariance ? [covariance] : []),
  ];
  const out = Buffer.alloc(4 + text.length + 8 * arrays.reduce((sum, { length }) => sum + length, 0));
  out.writeUInt32LE(text.length, 0);
  let at = 4 + text.copy(out, 4);
  for (const values of arrays) for (const value of values) at = out.writeDoubleLE(value, at);
  return out;
}

/** The same from the bytes of a version with `rows` values. */
export function readTheory(bytes: Uint8Array | null, rows: number): TheoryParts {
  if (!bytes) return noTheory;
  const view = new DataView(bytes.buffer, bytes.byteOffset, bytes.byteLength);
  const length = view.getUint32(0, true);
  const head = JSON.parse(Buffer.from(bytes.subarray(4, 4 + length)).toString('utf8')) as Head;
  let at = 4 + length;
  const take = (count: number): Float64Array => {
    const values = Float64Array.from({ length: count }, (_, i) => view.getFloat64(at + 8 * i, true));
    at += 8 * count;
    return values;
  };
  let window: Window | null = null;
  if (head.window) {
    const { size, edges } = head.window;
    const matrix = take(rows * size);
    const [lo, hi] = edges ? [take(size), take(size)] : [null, null];
    const kappa = lo && hi ? lo.map((low, j) => Math.sqrt(low * hi[j])) : take(size);
    window = { matrix, size, lo, hi, kappa };
  }
  const columns = head.columns.map((name): LinearColumn => ({ name, values: take(rows) }));
  const covariance = head.covariance ? take(rows * rows) : null;
  if (at !== bytes.byteLength) {
    throw new Error(`The stored theory of a measurement has ${bytes.byteLength} bytes where ${at} are due.`);
  }
  return { window, columns, covariance };
}

/** The rows that cuts keep, of a measurement of `rows` values: a window keeps all its theory bins. */
export function cutTheory(
  { window, columns, covariance }: TheoryParts,
  rows: number,
  kept: readonly number[],
): TheoryParts {
  const cutWindow = (whole: Window): Window => {
    const { size, matrix } = whole;
    const cut = new Float64Array(kept.length * size);
    kept.forEach((row, i) => cut.set(matrix.subarray(row * size, (row + 1) * size), i * size));
    return { ...whole, matrix: cut };
  };
  return {
    window: window && cutWindow(window),
    columns: columns.map(({ name, values }) => ({
      name,
      values: Float64Array.from(kept, (row) => values[row]),
    })),
    covariance: covariance && permuteMatrix(covariance, rows, kept),
  };
}
