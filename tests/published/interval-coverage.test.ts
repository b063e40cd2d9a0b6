import { describe, expect, it } from 'vitest';
import { choleskyInto, forwardSolve } from '@/lib/inference/cholesky';
import { intervalCoverage } from '@/lib/inference/interval-coverage';
import { matchedExponent } from '@/lib/inference';
import { betaProbability, betaQuantile, createRng, normalQuantile } from '@/lib/sampler';

const [p, mocks, parameters, content] = [20, 40, 3, 0.68];
const trials = 10_000;
const design = Float64Array.from({ length: p * parameters }, (_, i) => Math.cos(0.7 * i * i + 0.2 * i));

/** Half width, in standard deviations of its scale, of the central interval of a t of ν degrees of freedom. */
function tHalfWidth(freedom: number): number {
  const u = betaQuantile(content, 0.5, freedom / 2);
  return Math.sqrt((freedom * u) / (1 - u));
}

/**
 * Whole simulations: every mock drawn, S with divisor N − 1 inverted, the model fitted by generalised least squares. Counts how
 * often the interval of the first parameter holds the truth, for the plain inverse, Sellentin and Heavens, and the matched t.
 */
function wholeSimulation(seed: number): Record<'normal' | 'sellentin-heavens' | 'matched-t', number> {
  const rng = createRng(`whole simulations ${seed}`);
  const count = { normal: 0, 'sellentin-heavens': 0, 'matched-t': 0 };
  const exponents = { 'sellentin-heavens': mocks, 'matched-t': matchedExponent(mocks, p, parameters) };
  const drawn = new Float64Array(mocks * p);
  const s = new Float64Array(p * p);
  const l = new Float64Array(p * p);
  const columns = new Float64Array(parameters * p);
  const data = new Float64Array(p);
  for (let trial = 0; trial < trials; trial += 1) {
    for (let i = 0; i < drawn.length; i += 1) drawn[i] = rng.normal();
    for (let j = 0; j < p; j += 1) {
      let mean = 0;
      for (let a = 0; a < mocks; a += 1) mean += drawn[a * p + j] / mocks;
      for (let a = 0; a < mocks; a += 1) drawn[a * p + j] -= mean;
    }
    for (let i = 0; i < p; i += 1) {
      for (let j = 0; j <= i; j += 1) {
        let sum = 0;
        for (let a = 0; a < mocks; a += 1) sum += drawn[a * p + i] * drawn[a * p + j];
        s[i * p + j] = s[j * p + i] = sum / (mocks - 1);
      }
    }
    expect(choleskyInto(s, p, l)).toBe(-1);
    columns.set(design);
    for (let i = 0; i < p; i += 1) data[i] = rng.normal();
    for (let k = 0; k < parameters; k += 1) forwardSolve(l, p, columns, k * p);
    forwardSolve(l, p, data);
    const { fitted, variance, chiSquare } = leastSquares(columns, data);
    const offset = Math.abs(fitted);
    if (offset < normalQuantile(0.5 + content / 2) * Math.sqrt(variance)) count.normal += 1;
    for (const kind of ['sellentin-heavens', 'matched-t'] as const) {
      const freedom = exponents[kind] - parameters;
      const scale = Math.sqrt((variance * (mocks - 1 + chiSquare)) / freedom);
      if (offset < tHalfWidth(freedom) * scale) count[kind] += 1;
    }
  }
  return count;
}

/** First coefficient of the fit, its variance (FᵀF)⁻¹₁₁, and χ² at the best fit, by Gram–Schmidt from the last column to the first. */
function leastSquares(columns: Float64Array, data: Float64Array) {
  const dot = (a: Float64Array, b: Float64Array) => a.reduce((sum, value, i) => sum + value * b[i], 0);
  const residual = Float64Array.from(data);
  const basis: Float64Array[] = [];
  let fitted = 0;
  let variance = 0;
  for (let k = parameters - 1; k >= 0; k -= 1) {
    const column = Float64Array.from(columns.subarray(k * p, (k + 1) * p));
    for (const other of basis) {
      const along = dot(column, other) / dot(other, other);
      column.forEach((_, i) => (column[i] -= along * other[i]));
    }
    const size = dot(column, column);
    const along = dot(residual, column) / size;
    residual.forEach((_, i) => (residual[i] -= along * column[i]));
    [fitted, variance] = [along, 1 / size];
    basis.push(column);
  }
  return { fitted, variance, chiSquare: dot(residual, residual) };
}

describe('coverage of 68 % intervals at p = 20 values, N = 40 mocks, 3 parameters', () => {
  const whole = wholeSimulation(20);

  // The bounds are those of the covariance checks, derived by us.
  it.each([
    ['matched-t', 0.66, 0.7],
    ['sellentin-heavens', 0.53, 0.57],
    ['normal', 0.4, 0.44],
  ] as const)('is within bounds over 10,000 whole simulations: %s', (kind, lo, hi) => {
    expect(whole[kind] / trials).toBeGreaterThan(lo);
    expect(whole[kind] / trials).toBeLessThan(hi);
  });

  it.each(['matched-t', 'sellentin-heavens', 'normal'] as const)(
    'is the same from three numbers of the Wishart matrix, within 4 standard errors: %s',
    (likelihood) => {
      const asked = { likelihood, length: p, mocks, parameters, content, trials: 40_000 };
      const { covered, error } = intervalCoverage(asked, 'interval coverage 7');
      const found = whole[likelihood] / trials;
      const other = Math.sqrt((found * (1 - found)) / trials);
      expect(Math.abs(covered - found)).toBeLessThan(4 * Math.hypot(error, other));
    },
  );

  it('is P(|t_k| < t √(k/ν)), k = N − 1 − p + n_p, for the t forms, in which χ² at the best fit cancels', () => {
    const k = mocks - 1 - p + parameters;
    for (const likelihood of ['matched-t', 'sellentin-heavens'] as const) {
      const m = likelihood === 'matched-t' ? matchedExponent(mocks, p, parameters) : mocks;
      const t = tHalfWidth(m - parameters) * Math.sqrt(k / (m - parameters));
      const exact = betaProbability((t * t) / (k + t * t), 0.5, k / 2);
      const asked = { likelihood, length: p, mocks, parameters, content, trials: 40_000 };
      const { covered, error } = intervalCoverage(asked, 'interval coverage 8');
      expect(Math.abs(covered - exact)).toBeLessThan(4 * error);
    }
  });

  it('comes to its content, and to the width of a known covariance, with very many mocks', () => {
    const asked = { likelihood: 'matched-t', length: p, mocks: 200_000, parameters, content } as const;
    const { covered, error, width } = intervalCoverage({ ...asked, trials: 20_000 }, 'interval coverage 9');
    expect(Math.abs(covered - content)).toBeLessThan(4 * error);
    expect(Math.abs(width - 1)).toBeLessThan(0.005);
  });

  it('needs more mocks than data values', () => {
    const asked = { likelihood: 'normal', length: p, mocks: 22, parameters, content, trials: 1 } as const;
    expect(() => intervalCoverage(asked, 'interval coverage 1')).toThrow(/22 mocks are too few/);
  });
});
