import { betaProbability } from '@/lib/sampler/special-functions';
import { factorise } from './covariance';

/** How far one mock lies from all others. */
export interface MockDistance {
  /** 0-based. */
  mock: number;
  /** T² = (n−1)/n · (x − x̄₋)ᵀ S₋⁻¹ (x − x̄₋), mean and covariance from the other mocks alone. */
  squared: number;
  /** Probability of a larger one for a mock like the others. */
  probability: number;
}

/**
 * Squared Mahalanobis distance of each of n mocks to the mean of the others by their covariance. It needs no n inversions: with
 * D = (x − x̄)ᵀ S⁻¹ (x − x̄) of all mocks and b = n D/(n−1)², T² = (n−2) b/(1−b), and for normal mocks b has the distribution
 * Beta(p/2, (n−p−1)/2), which is Hotelling’s T² (Gnanadesikan and Kettenring 1972; from memory, tested against leaving out).
 *
 * @param columns p columns of n mocks with their mean taken out
 * @param covariance p × p of these mocks, divisor n − 1, row-major
 * @returns null where the covariance is singular; n > p + 1
 */
export function mockDistances(columns: Float64Array[], covariance: Float64Array): MockDistance[] | null {
  const p = columns.length;
  const n = columns[0].length;
  const factorisation = factorise(covariance, p);
  if ('failedMinor' in factorisation) return null;
  const { factor } = factorisation;
  const y = new Float64Array(p);
  return Array.from({ length: n }, (_, mock) => {
    let distance = 0;
    for (let i = 0; i < p; i += 1) {
      let sum = columns[i][mock];
      for (let j = 0; j < i; j += 1) sum -= factor[i * p + j] * y[j];
      y[i] = sum / factor[i * p + i];
      distance += y[i] * y[i];
    }
    // Below one but for rounding, where a mock alone spans a direction.
    const b = Math.min((n * distance) / (n - 1) ** 2, 1);
    return {
      mock,
      squared: ((n - 2) * b) / (1 - b),
      probability: betaProbability(1 - b, (n - p - 1) / 2, p / 2),
    };
  });
}
