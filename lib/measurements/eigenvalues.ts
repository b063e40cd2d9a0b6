import { EigenvalueDecomposition, Matrix } from 'ml-matrix';

/** Smallest and largest eigenvalue. */
export interface ExtremeEigenvalues {
  smallest: number;
  largest: number;
}

/**
 * Smallest and largest eigenvalue of a symmetric p × p matrix (row-major, p ≥ 1, finite elements). Error of order
 * p·2⁻⁵²·‖matrix‖. The decomposition is ml-matrix's; the matrix is scaled to elements near 1 first, so that no square of
 * them leaves the range of doubles.
 */
export function extremeEigenvalues(matrix: Float64Array, p: number): ExtremeEigenvalues {
  const scale = matrix.reduce((largest, value) => Math.max(largest, Math.abs(value)), 0);
  if (scale === 0) return { smallest: 0, largest: 0 };
  const scaled = Matrix.from1DArray(
    p,
    p,
    matrix.map((value) => value / scale),
  );
  const { realEigenvalues } = new EigenvalueDecomposition(scaled, { assumeSymmetric: true });
  return { smallest: scale * Math.min(...realEigenvalues), largest: scale * Math.max(...realEigenvalues) };
}
