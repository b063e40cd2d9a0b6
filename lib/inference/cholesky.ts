/**
 * Cholesky factors of small and middling symmetric matrices, row-major in flat arrays, without allocation:
 * A = L Lᵀ with L lower triangular.
 */

/**
 * Factorises the n × n matrix `a` into `l` (lower triangle; the rest is left alone). Both may be the same array.
 * Returns −1, or the row at which A stops being positive definite.
 */
export function choleskyInto(a: Float64Array, n: number, l: Float64Array): number {
  for (let i = 0; i < n; i += 1) {
    for (let j = 0; j <= i; j += 1) {
      let sum = a[i * n + j];
      for (let k = 0; k < j; k += 1) sum -= l[i * n + k] * l[j * n + k];
      if (i !== j) l[i * n + j] = sum / l[j * n + j];
      else if (sum > 0) l[i * n + i] = Math.sqrt(sum);
      else return i;
    }
  }
  return -1;
}

/** Solves L y = b in place (b becomes y); `offset` is where the vector starts in `b`. */
export function forwardSolve(l: Float64Array, n: number, b: Float64Array, offset = 0): void {
  for (let i = 0; i < n; i += 1) {
    let sum = b[offset + i];
    for (let k = 0; k < i; k += 1) sum -= l[i * n + k] * b[offset + k];
    b[offset + i] = sum / l[i * n + i];
  }
}

/** Solves Lᵀ x = y in place. */
export function backwardSolve(l: Float64Array, n: number, y: Float64Array): void {
  for (let i = n - 1; i >= 0; i -= 1) {
    let sum = y[i];
    for (let k = i + 1; k < n; k += 1) sum -= l[k * n + i] * y[k];
    y[i] = sum / l[i * n + i];
  }
}

/** ln |A| = 2 Σ ln L_ii. */
export function logDeterminant(l: Float64Array, n: number): number {
  let sum = 0;
  for (let i = 0; i < n; i += 1) sum += Math.log(l[i * n + i]);
  return 2 * sum;
}
