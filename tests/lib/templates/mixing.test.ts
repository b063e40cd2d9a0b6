import { describe, expect, it } from 'vitest';
import { createRng } from '@/lib/sampler/rng';
import {
  anglesFromWeights,
  anglesJacobian,
  drawIsotropicAngles,
  isotropicMarginal,
  logIsotropicDensity,
  mixingWeights,
} from '@/lib/templates';

/** Angles inside (0, π/2), one set for each number of fields. */
const sets: [number, number[]][] = [
  [1, []],
  [2, [0.4]],
  [3, [0.3, 0.9]],
  [4, [0.5, 1.1, 0.8]],
];

function determinant(rows: number[][]): number {
  if (rows.length === 0) return 1;
  return rows[0].reduce((sum, value, column) => {
    const minor = rows.slice(1).map((row) => row.filter((_, j) => j !== column));
    return sum + (column % 2 === 0 ? 1 : -1) * value * determinant(minor);
  }, 0);
}

describe('mixing weights', () => {
  it.each(sets)('of %i fields add up to one and lead back to their angles', (_, angles) => {
    const weights = mixingWeights(angles);
    expect(weights.reduce((sum, w) => sum + w, 0)).toBeCloseTo(1, 15);
    const back = anglesFromWeights(weights);
    angles.forEach((angle, i) => expect(back[i]).toBeCloseTo(angle, 14));
  });
  it.each(sets)('of %i fields change with the angles by the Jacobian', (_, angles) => {
    const step = 1e-4;
    const columns = angles.map((_angle, k) => {
      const at = (shift: number) =>
        mixingWeights(angles.map((angle, j) => (j === k ? angle + shift : angle)));
      const [far, near, minusNear, minusFar] = [at(2 * step), at(step), at(-step), at(-2 * step)];
      return angles.map((_w, i) => (8 * (near[i] - minusNear[i]) - (far[i] - minusFar[i])) / (12 * step));
    });
    expect(anglesJacobian(angles)).toBeCloseTo(Math.abs(determinant(columns)), 10);
  });
  it('at a corner leave no NaN: a lone field has angle zero or a right angle', () => {
    expect([...anglesFromWeights([1, 0, 0, 0])]).toEqual([0, 0, 0]);
    expect([...anglesFromWeights([0, 0, 0, 1])]).toEqual([Math.PI / 2, Math.PI / 2, Math.PI / 2]);
    expect([...anglesFromWeights([0, 0, 1])]).toEqual([0, Math.PI / 2]);
  });
  it('that are negative or do not add up to one are refused', () => {
    expect(() => anglesFromWeights([1.2, -0.2])).toThrow(
      expect.objectContaining({ code: 'invalid_weights', path: 'weights[1]' }),
    );
    expect(() => anglesFromWeights([0.5, 0.4])).toThrow(
      expect.objectContaining({ code: 'invalid_weights', path: 'weights' }),
    );
  });
});

describe('the isotropic prior', () => {
  it('has the stated densities', () => {
    expect(logIsotropicDensity([])).toBe(0);
    expect(logIsotropicDensity([0.7])).toBeCloseTo(Math.log(2 / Math.PI), 14);
    expect(logIsotropicDensity([0.7, 0.4])).toBeCloseTo(Math.log((2 / Math.PI) * Math.cos(0.4)), 14);
    expect(logIsotropicDensity([0.7, 0.4, 1])).toBeCloseTo(
      Math.log((8 / Math.PI ** 2) * Math.sin(0.7) ** 2 * Math.sin(0.4)),
      14,
    );
  });
  it('has no density outside [0, pi/2], and none for five fields', () => {
    expect(logIsotropicDensity([-0.1])).toBe(-Infinity);
    expect(logIsotropicDensity([0.1, 1.6])).toBe(-Infinity);
    expect(logIsotropicDensity([0.1, NaN])).toBe(-Infinity);
    expect(() => logIsotropicDensity([0.1, 0.1, 0.1, 0.1])).toThrow(/0 to 3 mixing angles/);
    expect(() => drawIsotropicAngles(() => 0.5, new Float64Array(4))).toThrow(/0 to 3/);
  });
  it.each([2, 3, 4])('is what the draws of %i fields follow, in every angle', (fields) => {
    // A lattice of midpoints stands in for the uniforms, so that empirical and exact distributions differ by rounding
    // of the lattice only.
    const side = [0, 0, 20_000, 200, 40][fields];
    const count = side ** (fields - 1);
    const out = new Float64Array(fields - 1);
    const samples = Array.from({ length: fields - 1 }, () => new Float64Array(count));
    for (let n = 0; n < count; n += 1) {
      let rest = n;
      const uniform = (): number => {
        const digit = rest % side;
        rest = Math.floor(rest / side);
        return (digit + 0.5) / side;
      };
      drawIsotropicAngles(uniform, out);
      out.forEach((angle, k) => {
        samples[k][n] = angle;
      });
    }
    const flat = (angle: number) => angle / (Math.PI / 2);
    const exact: Record<number, ((angle: number) => number)[]> = {
      2: [flat],
      3: [flat, Math.sin],
      4: [(angle) => (2 * angle - Math.sin(2 * angle)) / Math.PI, (angle) => 1 - Math.cos(angle), flat],
    };
    samples.forEach((sample, k) => {
      sample.sort();
      const distance = sample.reduce(
        (worst, angle, i) => Math.max(worst, Math.abs((i + 0.5) / count - exact[fields][k](angle))),
        0,
      );
      expect(distance, `angle ${k + 1}`).toBeLessThan(1 / side);
    });
  });

  it.each([2, 3, 4])(
    'leaves each angle of %i fields the marginal that integrates its distribution',
    (fields) => {
      const exact: Record<number, ((angle: number) => number)[]> = {
        2: [(angle) => angle / (Math.PI / 2)],
        3: [(angle) => angle / (Math.PI / 2), Math.sin],
        4: [
          (angle) => (2 * angle - Math.sin(2 * angle)) / Math.PI,
          (angle) => 1 - Math.cos(angle),
          (angle) => angle / (Math.PI / 2),
        ],
      };
      exact[fields].forEach((cdf, k) => {
        for (let angle = 0.1; angle < 1.5; angle += 0.1) {
          const step = 1e-4;
          const slope = (cdf(angle + step) - cdf(angle - step)) / (2 * step);
          expect(isotropicMarginal(fields, k, angle)).toBeCloseTo(slope, 7);
        }
        expect(isotropicMarginal(fields, k, -0.1)).toBe(0);
        expect(isotropicMarginal(fields, k, 1.6)).toBe(0);
      });
      expect(() => isotropicMarginal(fields, fields - 1, 0.5)).toThrow(/has no density/);
    },
  );

  /** First row of a random orthogonal matrix: Gram–Schmidt keeps the direction of its first vector of normals. */
  function randomRow(fields: number, normal: () => number): Float64Array {
    const row = Float64Array.from({ length: fields }, normal);
    const length = Math.hypot(...row);
    return row.map((value) => value / length);
  }

  it.each([2, 3, 4])('is that of the first row of random orthogonal matrices, %i fields', (fields) => {
    const rng = createRng(`orthogonal ${fields}`);
    const count = 4_000;
    const rows = Array.from({ length: count }, () => randomRow(fields, () => rng.normal()));
    const distanceOf = (values: Float64Array, cdf: (value: number) => number): number =>
      Math.sqrt(count) *
      values.sort().reduce((worst, value, i) => {
        const exact = cdf(value);
        return Math.max(worst, Math.abs(exact - i / count), Math.abs(exact - (i + 1) / count));
      }, 0);
    // Angles of their squared elements against the integral of the marginal, by Simpson's rule.
    const angles = rows.map((row) => anglesFromWeights(row.map((value) => value * value)));
    for (let k = 0; k < fields - 1; k += 1) {
      const cdf = (angle: number): number => {
        const parts = 200;
        let sum = 0;
        for (let i = 0; i <= parts; i += 1) {
          const weight = i === 0 || i === parts ? 1 : i % 2 ? 4 : 2;
          sum += weight * isotropicMarginal(fields, k, (angle * i) / parts);
        }
        return (sum * angle) / parts / 3;
      };
      // Kolmogorov–Smirnov at 1e-4: √n D < 2.23.
      expect(
        distanceOf(
          Float64Array.from(angles, (each) => each[k]),
          cdf,
        ),
      ).toBeLessThan(2.23);
    }
    // And the other way: weights of isotropic angles are Dirichlet(½, …, ½), each Beta(½, (N − 1)/2).
    const beta: Record<number, (w: number) => number> = {
      2: (w) => (2 / Math.PI) * Math.asin(Math.sqrt(w)),
      3: (w) => Math.sqrt(w),
      4: (w) => (2 / Math.PI) * (Math.sqrt(w * (1 - w)) + Math.asin(Math.sqrt(w))),
    };
    const out = new Float64Array(fields - 1);
    const weights = Array.from({ length: count }, () => {
      drawIsotropicAngles(() => rng.uniform(), out);
      return mixingWeights(out);
    });
    for (let i = 0; i < fields; i += 1) {
      expect(
        distanceOf(
          Float64Array.from(weights, (w) => w[i]),
          beta[fields],
        ),
      ).toBeLessThan(2.23);
    }
  });
});
