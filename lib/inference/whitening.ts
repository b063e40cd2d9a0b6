import { choleskyInto, forwardSolve, logDeterminant } from './cholesky';
import { InferenceError } from './inference-error';
import type { FitData } from './types';

/** The whitened data, L⁻¹ S with C = L Lᵀ. */
export interface WhitenedData {
  /** Number of data values p. */
  readonly length: number;
  /** L⁻¹ S, or its coordinates in the fewer directions that matter (see `compress`). */
  readonly data: Float64Array;
  /** ln |C|. */
  readonly logDeterminant: number;
}

/** The data's metric, settled once a fit: C = L Lᵀ, whitened vectors are L⁻¹ x, so that χ² is a plain sum of squares. */
export interface Whitening extends WhitenedData {
  /** ln |C| of the values from `from` to before `to`, where C is 0 between them and the others. */
  logDeterminantOf(from: number, to: number): number;
  /** Replaces the vector of length p that starts at `offset` by L⁻¹ times it. */
  apply(vector: Float64Array, offset?: number): void;
}

/**
 * Checks data and covariance (after cuts) and factorises the covariance. Throws InferenceError naming the place:
 * sizes that don't match, a number that isn't finite, asymmetry beyond 1e-8 of the diagonal, not positive definite.
 */
export function buildWhitening(data: FitData): Whitening {
  const p = data.S.length;
  if (p === 0)
    throw new InferenceError(
      'data_length',
      'data.S',
      'no data value is left after the cuts',
      'widen the cuts',
    );
  if (data.covariance.length !== p * p) {
    throw new InferenceError(
      'covariance_size',
      'data.covariance',
      `the covariance has ${data.covariance.length} numbers; ${p} data values need ${p} × ${p} = ${p * p}`,
      'cut data and covariance alike',
    );
  }
  const badPoint = data.S.findIndex((value) => !Number.isFinite(value));
  if (badPoint >= 0) {
    const message = `data value ${badPoint} is not a finite number`;
    throw new InferenceError(
      'data_not_finite',
      `data.S[${badPoint}]`,
      message,
      'remove the bin or correct the file',
    );
  }
  const badEntry = data.covariance.findIndex((value) => !Number.isFinite(value));
  if (badEntry >= 0) {
    const path = `data.covariance[${Math.floor(badEntry / p)}][${badEntry % p}]`;
    throw new InferenceError(
      'data_not_finite',
      path,
      'this entry is not a finite number',
      'correct the covariance',
    );
  }
  for (let i = 0; i < p; i += 1) {
    for (let j = 0; j < i; j += 1) {
      const scale = Math.sqrt(Math.abs(data.covariance[i * p + i] * data.covariance[j * p + j]));
      if (Math.abs(data.covariance[i * p + j] - data.covariance[j * p + i]) > 1e-8 * scale) {
        throw new InferenceError(
          'covariance_not_symmetric',
          `data.covariance[${i}][${j}]`,
          `the covariance differs from its transpose at row ${i}, column ${j}`,
          'give a symmetric covariance',
        );
      }
    }
  }
  const l = new Float64Array(p * p);
  const row = choleskyInto(data.covariance, p, l);
  if (row >= 0) {
    throw new InferenceError(
      'covariance_not_positive_definite',
      `data.covariance[${row}][${row}]`,
      `the covariance is not positive definite (row ${row})`,
      'check that no bin is a combination of others, and that there are more mocks than bins',
    );
  }
  const whitened = Float64Array.from(data.S);
  forwardSolve(l, p, whitened);
  return {
    length: p,
    data: whitened,
    logDeterminant: logDeterminant(l, p),
    logDeterminantOf(from, to) {
      let sum = 0;
      for (let i = from; i < to; i += 1) sum += 2 * Math.log(l[i * p + i]);
      return sum;
    },
    apply: (vector, offset = 0) => forwardSolve(l, p, vector, offset),
  };
}
