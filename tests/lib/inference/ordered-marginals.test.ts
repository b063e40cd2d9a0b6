import { describe, expect, it } from 'vitest';
import { createRng } from '@/lib/sampler/rng';
import { inducedMarginals, massChains, orderedMarginal, type OrderedMarginal } from '@/lib/inference';
import { drawOrderedMasses, logOrderProbability, type MassPrior } from '@/lib/inference/ordered-masses';
import { lnPriorDensity } from '@/lib/inference/priors';

const uniform = (lo: number, hi: number): MassPrior => ({ kind: 'uniform', lo, hi });

/** The distribution function between its grid points, which lie a thousandth of the range apart. */
function cdfAt({ x, cdf }: OrderedMarginal, value: number): number {
  if (value <= x[0]) return cdf[0];
  const above = x.findIndex((each) => each >= value);
  if (above < 0) return 1;
  const part = (value - x[above - 1]) / (x[above] - x[above - 1]);
  return cdf[above - 1] + part * (cdf[above] - cdf[above - 1]);
}

function choose(n: number, k: number): number {
  let value = 1;
  for (let i = 1; i <= k; i += 1) value *= (n - k + i) / i;
  return value;
}

describe('the marginal that order leaves of a mass', () => {
  it.each([
    [2, 1],
    [2, 2],
    [3, 2],
    [4, 1],
    [4, 3],
    [4, 4],
  ])('of %i equal uniforms is that of order statistic %i', (n, k) => {
    // Textbook: the k-th of n uniform order statistics on [0, 1] is Beta(k, n + 1 − k).
    const [lo, hi] = [0.2, 8];
    const marginal = orderedMarginal(
      Array.from({ length: n }, () => uniform(lo, hi)),
      k - 1,
    )!;
    marginal.x.forEach((x, i) => {
      const u = (x - lo) / (hi - lo);
      const density = (k * choose(n, k) * u ** (k - 1) * (1 - u) ** (n - k)) / (hi - lo);
      let cdf = 0;
      for (let j = k; j <= n; j += 1) cdf += choose(n, j) * u ** j * (1 - u) ** (n - j);
      expect(Math.abs(marginal.density[i] - density)).toBeLessThan(1e-10);
      expect(Math.abs(marginal.cdf[i] - cdf)).toBeLessThan(1e-10);
    });
  });

  it('of two overlapping uniforms has the closed form', () => {
    // x1 in [0, 2], x2 in [1, 4], Z = 11/12: p1 G / Z with G = 1 below 1, (4 − x)/3 above.
    const first = orderedMarginal([uniform(0, 2), uniform(1, 4)], 0)!;
    first.x.forEach((x, i) => {
      const exact = (x < 0 || x > 2 ? 0 : x < 1 ? 0.5 : (0.5 * (4 - x)) / 3) / (11 / 12);
      expect(Math.abs(first.density[i] - exact)).toBeLessThan(1e-10);
    });
    const second = orderedMarginal([uniform(0, 2), uniform(1, 4)], 1)!;
    second.x.forEach((x, i) => {
      const exact = (x < 1 || x > 4 ? 0 : (x < 2 ? x / 2 : 1) / 3) / (11 / 12);
      expect(Math.abs(second.density[i] - exact)).toBeLessThan(1e-10);
    });
  });

  it('is cut at a fixed mass, which has none itself', () => {
    const priors: MassPrior[] = [uniform(0, 8), { kind: 'fixed', value: 3 }, uniform(0, 8)];
    expect(orderedMarginal(priors, 1)).toBeNull();
    const below = orderedMarginal(priors, 0)!;
    below.x.forEach((x, i) => expect(below.density[i]).toBeCloseTo(x > 0 && x < 3 ? 1 / 3 : 0, 10));
    const above = orderedMarginal(priors, 2)!;
    above.x.forEach((x, i) => expect(above.density[i]).toBeCloseTo(x > 3 && x < 8 ? 1 / 5 : 0, 10));
  });

  it('is the stated density where order takes nothing away, and null where it is impossible', () => {
    const stated: MassPrior = { kind: 'truncated-normal', mean: 1, sd: 0.2, lo: 0.2, hi: 2 };
    const marginal = orderedMarginal([stated, uniform(3, 5)], 0)!;
    marginal.x.forEach((x, i) =>
      expect(marginal.density[i]).toBeCloseTo(Math.exp(lnPriorDensity(stated, x)), 9),
    );
    expect(orderedMarginal([uniform(3, 4), uniform(1, 2)], 0)).toBeNull();
  });

  const sets: [string, MassPrior[]][] = [
    [
      'four of different kinds',
      [
        { kind: 'log-uniform', lo: 0.2, hi: 8 },
        { kind: 'half-normal', sd: 3 },
        { kind: 'truncated-normal', mean: 4, sd: 1.5, lo: 0.2, hi: 9 },
        uniform(1, 9),
      ],
    ],
    [
      'three, one of them fixed',
      [uniform(0.2, 8), { kind: 'fixed', value: 2.5 }, { kind: 'normal', mean: 4, sd: 2 }],
    ],
    ['four equal', Array.from({ length: 4 }, (): MassPrior => ({ kind: 'log-uniform', lo: 0.2, hi: 8 }))],
  ];
  it.each(sets)('is what draws in order follow: %s', (name, priors) => {
    const count = 2_000;
    const rng = createRng(`ordered marginal of ${name}`);
    const out = new Float64Array(priors.length);
    const samples = priors.map(() => new Float64Array(count));
    for (let k = 0; k < count; k += 1) {
      drawOrderedMasses(priors, rng, out);
      out.forEach((value, i) => (samples[i][k] = value));
    }
    priors.forEach((_, i) => {
      const marginal = orderedMarginal(priors, i);
      if (!marginal) return;
      samples[i].sort();
      const distance = samples[i].reduce((worst, value, k) => {
        const exact = cdfAt(marginal, value);
        return Math.max(worst, Math.abs(exact - k / count), Math.abs(exact - (k + 1) / count));
      }, 0);
      // Kolmogorov–Smirnov at 1e-4: √n D < 2.23.
      expect(distance * Math.sqrt(count), `mass ${i + 1}`).toBeLessThan(2.23);
      // Averaged over the joint density the marginals are one distribution each: they end at 1.
      expect(marginal.cdf[marginal.cdf.length - 1]).toBeCloseTo(1, 3);
    });
  });

  it('is far from the stated density where it ought to be: the same draws reject that', () => {
    const priors = Array.from({ length: 4 }, () => uniform(0, 1));
    const marginal = orderedMarginal(priors, 0)!;
    // Order statistic 1 of 4 against U(0, 1): sup |1 − (1 − u)^4 − u| = 0.4725 at u = 1 − 4^(−1/3).
    const distance = marginal.x.reduce((worst, x, i) => Math.max(worst, Math.abs(marginal.cdf[i] - x)), 0);
    expect(distance).toBeCloseTo(0.4725, 2);
    expect(Math.exp(logOrderProbability(priors))).toBeCloseTo(1 / 24, 12);
  });
});

describe('what order leaves of the masses of two kinds', () => {
  it('counts light fields backwards: ν descends, and neither kind restrains the other', () => {
    expect(massChains(['light', 'light', 'heavy', 'heavy'])).toEqual([
      [1, 0],
      [2, 3],
    ]);
    expect(massChains(['heavy'])).toEqual([[0]]);
    const kinds = ['light', 'light', 'heavy'] as const;
    const [largest, smallest, alone] = inducedMarginals(kinds, [uniform(0, 1), uniform(0, 1), uniform(0, 8)]);
    expect(alone).toBeNull();
    // Of two uniforms on [0, 1] the larger has the density 2x, the smaller 2(1 − x).
    largest!.x.forEach((x, i) => expect(Math.abs(largest!.density[i] - 2 * x)).toBeLessThan(1e-10));
    smallest!.x.forEach((x, i) => expect(Math.abs(smallest!.density[i] - 2 * (1 - x))).toBeLessThan(1e-10));
  });

  it('has none for a fixed mass, and none where no order is possible', () => {
    const heavy = ['heavy', 'heavy'] as const;
    expect(inducedMarginals(heavy, [{ kind: 'fixed', value: 2 }, uniform(1, 4)])[0]).toBeNull();
    expect(inducedMarginals(heavy, [uniform(3, 4), uniform(1, 2)])).toEqual([null, null]);
  });
});
