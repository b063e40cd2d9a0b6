import { describe, expect, it } from 'vitest';
import { amplitudeBias, reachOf } from '@/lib/inference/template-accuracy';
import { exactLightShapeTotal, lightCoefficients, type Vertex } from '@/lib/templates';

/**
 * Highest κ at which the amplitude, fitted with nb powers of κ from 1 on, is off by 1, 5 and 10 %: points uniform in ln κ from
 * 1e-3, errors as κ^½, noise-free total of three permutations. Derived by us with direct in-in integrals and an independent
 * program (status: derived, two figures, a coarse scan); null where the scan ended at 0.8 without reaching it.
 */
const tabulated: { vertex: Vertex; mu: number; nb: number; reach: (number | null)[] }[] = [
  { vertex: 1, mu: 1, nb: 1, reach: [0.3, null, null] },
  { vertex: 1, mu: 2, nb: 1, reach: [0.019, 0.092, 0.16] },
  { vertex: 1, mu: 2, nb: 2, reach: [0.25, 0.57, null] },
  { vertex: 1, mu: 3, nb: 2, reach: [0.089, 0.21, 0.29] },
  { vertex: 1, mu: 3, nb: 3, reach: [0.37, 0.63, 0.8] },
  { vertex: 1, mu: 4, nb: 3, reach: [0.17, 0.28, 0.35] },
  { vertex: 1, mu: 5, nb: 4, reach: [0.23, 0.35, 0.41] },
  { vertex: 2, mu: 2, nb: 1, reach: [0.06, 0.19, 0.28] },
  { vertex: 2, mu: 3, nb: 2, reach: [0.23, 0.71, null] },
  { vertex: 2, mu: 4, nb: 3, reach: [0.26, 0.46, 0.61] },
  { vertex: 2, mu: 5, nb: 4, reach: [0.29, 0.43, 0.54] },
];

const lo = 1e-3;
const points = 400;
const kappa = Float64Array.from(
  { length: points },
  (_, i) => lo * Math.exp((i * Math.log(0.8 / lo)) / (points - 1)),
);
const axis = { kind: 'points', kappa } as const;
const metric = { sigma: kappa.map(Math.sqrt) };
const counts = Array.from({ length: points - 40 }, (_, i) => i + 41).filter((count) => count % 3 === 0);
const upper = counts.map((count) => kappa[count - 1]);

describe('how far the squeezed template holds', () => {
  it('gives the reach in κ at 1, 5 and 10 % that is tabulated, within a tenth', () => {
    const off = tabulated.flatMap(({ vertex, mu, nb, reach }) => {
      const powers = [[1, 2, 3, 4].slice(0, nb)];
      const [bias] = amplitudeBias({ kind: 'heavy', mass: mu, vertex, axis, metric, powers, counts });
      return [0.01, 0.05, 0.1].flatMap((share, k) => {
        const found = reachOf(bias, upper, lo, share);
        const wanted = reach[k] ?? 0.8;
        return Math.abs(Math.log(found / wanted)) < Math.log(1.1)
          ? []
          : [`vertex ${vertex}, mu ${mu}, ${nb} powers, ${share}: ${found} for ${wanted}`];
      });
    });
    expect(off).toEqual([]);
  });

  it('finds the amplitude of a light field from its leading terms, and what is left at κ = 0.1', () => {
    const [none, one] = amplitudeBias({
      kind: 'light',
      mass: 1.2,
      vertex: 1,
      axis,
      metric,
      powers: [[], [1]],
      counts: [200, points],
    });
    // Far out κ^{1/2−ν} stands alone: what follows it is of relative order κ^{1/2+ν}.
    expect(none[0]).toBeLessThan(0.02);
    expect(none[1]).toBeGreaterThan(none[0]);
    expect(one[1]).toBeLessThan(none[1]);
    const { minus } = lightCoefficients(1.2, 1);
    expect(exactLightShapeTotal(1.2, 1e-3, 1) / (minus * 1e-3 ** -0.7)).toBeCloseTo(1, 2);
  });

  it('is no number where bins are fewer than what is fitted', () => {
    const few = { kind: 'points', kappa: kappa.slice(0, 3) } as const;
    const [bias] = amplitudeBias({
      kind: 'heavy',
      mass: 1,
      vertex: 2,
      axis: few,
      metric: { sigma: metric.sigma.slice(0, 3) },
      powers: [[1, 2]],
      counts: [3],
    });
    expect(bias[0]).toBeNaN();
    expect(reachOf(bias, [few.kappa[2]], lo, 0.01)).toBeNaN();
  });
});
