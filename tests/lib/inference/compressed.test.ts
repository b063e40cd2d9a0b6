import { describe, expect, it } from 'vitest';
import { compress, reachOf, type WhitenedVectors } from '@/lib/inference/compressed';
import { buildWhitenedField } from '@/lib/inference/whitened-field';
import { buildWhitening } from '@/lib/inference/whitening';
import { createRng } from '@/lib/sampler/rng';
import { compileTemplate } from '@/lib/templates';

/** Two fields and two background columns over `p` points, their errors correlated, μ up to `most`. */
function vectorsOf(p: number, most: number, secondFixed = false): WhitenedVectors {
  const kappa = Float64Array.from({ length: p }, (_, i) => 0.004 * 75 ** (i / (p - 1)));
  const template = compileTemplate(
    'free-phase',
    { fields: 2, background: [1, 2] },
    { kind: 'points', kappa },
  );
  const whitening = buildWhitening({
    S: kappa.map((x) => 30 * Math.sqrt(x) * Math.cos(2 * Math.log(x)) + Math.sin(97 * x)),
    covariance: Float64Array.from(
      { length: p * p },
      (_, k) => 0.01 * 0.3 ** Math.abs(Math.floor(k / p) - (k % p)),
    ),
    mockCount: null,
  });
  const background = new Float64Array(2 * p);
  template.fixedColumns.forEach(({ values }, j) => {
    background.set(values, j * p);
    whitening.apply(background, j * p);
  });
  const ranges = [[0.3, most] as const, secondFixed ? ([2.5, 2.5] as const) : ([0.3, most] as const)];
  const fields = template.blocks.map((block, f) => buildWhitenedField(block, whitening, ranges[f]));
  return { whitening, fields, background };
}

/** Data less columns times coefficients. */
function residualOf(
  { whitening, fields, background }: WhitenedVectors,
  masses: number[],
  c: number[],
): Float64Array {
  const rest = whitening.data.slice();
  const size = rest.length;
  const columns = [fields[0].at(masses[0]), fields[1].at(masses[1]), background];
  columns.forEach((pair, k) => {
    for (let i = 0; i < size; i += 1) rest[i] -= c[2 * k] * pair[i] + c[2 * k + 1] * pair[size + i];
  });
  return rest;
}

const chiSquareOf = (rest: Float64Array): number => rest.reduce((sum, x) => sum + x * x, 0);

describe('vectors in fewer coordinates', () => {
  it.each([
    [40, 8, false],
    [320, 8, false],
    [41, 6, true],
  ])('give the same χ² for %i points and μ up to %d (second mass fixed: %s)', (p, most, fixed) => {
    const whole = vectorsOf(p, most, fixed);
    const few = compress(whole);
    expect(few.whitening.length).toBe(p);
    // A band of frequencies up to μ over ln 75 has about 2 + 2 μ ln(75)/π directions; some more decay to 1e-12 of the largest.
    expect(few.whitening.data.length).toBeLessThan(36);
    expect(few.whitening.data.length).toBeGreaterThan(2 + (2 * most * Math.log(75)) / Math.PI);
    expect(reachOf(few.whitening.data, few.background)).toBe(3);
    const rng = createRng('compressed');
    for (let k = 0; k < 200; k += 1) {
      const masses = [0.3 + (most - 0.3) * rng.uniform(), fixed ? 2.5 : 0.3 + (most - 0.3) * rng.uniform()];
      const c = Array.from({ length: 6 }, () => 30 * rng.normal());
      const plain = residualOf(whole, masses, c);
      const found = residualOf(few, masses, c);
      // What is lost is at most 3e-12 of columns whose norms are within a few times the residual's.
      expect(Math.abs(chiSquareOf(found) / chiSquareOf(plain) - 1)).toBeLessThan(1e-10);
    }
  });

  it('are left as they are where nearly all directions are needed', () => {
    const whole = vectorsOf(30, 60);
    expect(compress(whole)).toBe(whole);
    expect(reachOf(whole.whitening.data, whole.background)).toBe(30);
  });
});
