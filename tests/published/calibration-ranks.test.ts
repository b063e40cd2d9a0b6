import { readFileSync } from 'node:fs';
import { fileURLToPath } from 'node:url';
import { describe, expect, it } from 'vitest';
import { buildNoise, drawGamma, judgeRanks, rankBand, rankCounts } from '@/lib/inference/calibration';
import { createRng } from '@/lib/sampler';
import bands from './data/calibration/ecdf_bands.json';
import expected from './data/calibration/expected.json';

/** Sources: data/calibration/README.md. */
function ranksOf(kind: string): number[] {
  const path = fileURLToPath(new URL(`./data/calibration/ranks_${kind}.csv`, import.meta.url));
  return readFileSync(path, 'utf8').trim().split('\n').slice(1).map(Number);
}

describe('bands of ranks', () => {
  it.each(bands)('hold at once with the exact probability: N $N, K $K, alpha $alpha', (reference) => {
    const band = rankBand(reference.N, reference.K, reference.alpha);
    expect(band.lower).toEqual(reference.lower_counts);
    expect(band.upper).toEqual(reference.upper_counts);
    expect(band.coverage).toBeCloseTo(reference.exact_simultaneous_coverage, 9);
    expect(band.gamma / reference.gamma).toBeCloseTo(1, 5);
  });

  it.each(['calibrated', 'overconfident', 'underconfident', 'biased'] as const)('judge %s ranks', (kind) => {
    const reference = expected[kind];
    const verdict = judgeRanks({ x: ranksOf(kind) }, reference.L, 0.05);
    const [x] = verdict.quantities;
    expect(verdict.calibrated).toBe(reference.ecdf_verdict_95 === 'pass');
    expect(x.outside).toBe(reference.ecdf_points_outside_95pct_simultaneous_band);
    expect(x.chiSquare).toBeCloseTo(reference.chi2, 9);
    expect(x.locationZ).toBeCloseTo(reference.z_of_mean, 9);
    const bins = [...x.counts, reference.N].map((count, i) => count - (i > 0 ? x.counts[i - 1] : 0));
    expect(bins).toEqual(reference.counts);
    const shapes = {
      calibrated: null,
      overconfident: 'too narrow',
      underconfident: 'too wide',
      biased: 'too high',
    };
    expect(x.shape).toBe(shapes[kind]);
  });

  it('count in whole numbers: a rank on a boundary is not below it', () => {
    expect(rankCounts([55, 54], 99, 20)[10]).toBe(1);
  });

  it('refuse what gives no band', () => {
    expect(() => rankBand(0, 20, 0.05)).toThrow(RangeError);
    expect(() => judgeRanks({ x: [1] }, 100)).toThrow(/don’t divide/);
  });
});

describe('simulated noise', () => {
  // Moments of the multivariate t with ν = m − p: covariance C (N − 1)/(ν − 2).
  it.each([
    ['normal', null, 1],
    ['hartlap', 40, 39 / 36],
    ['sellentin-heavens', 40, 39 / 36],
  ] as const)('has the covariance of the %s likelihood', (kind, mockCount, factor) => {
    const covariance = Float64Array.from([4, 1.2, 1.2, 1]);
    const noise = buildNoise(kind, { covariance, mockCount }, 2);
    const rng = createRng(kind);
    const n = 40_000;
    const sums = [0, 0, 0];
    for (let i = 0; i < n; i += 1) {
      const [a, b] = noise(rng);
      sums[0] += (a * a) / n;
      sums[1] += (a * b) / n;
      sums[2] += (b * b) / n;
    }
    // Five standard errors, √(2/n) of a variance.
    expect(Math.abs(sums[0] / (4 * factor) - 1)).toBeLessThan(0.036);
    expect(Math.abs(sums[1] / (1.2 * factor) - 1)).toBeLessThan(0.07);
    expect(Math.abs(sums[2] / factor - 1)).toBeLessThan(0.036);
  });

  it.each([0.4, 3.7])('draws gamma variables of shape %s: mean and variance are the shape', (shape) => {
    const rng = createRng('gamma');
    const draws = Array.from({ length: 40_000 }, () => drawGamma(rng, shape));
    const mean = draws.reduce((sum, x) => sum + x, 0) / draws.length;
    const variance = draws.reduce((sum, x) => sum + (x - mean) ** 2, 0) / draws.length;
    expect(Math.abs(mean / shape - 1)).toBeLessThan(0.04);
    expect(Math.abs(variance / shape - 1)).toBeLessThan(0.12);
  });
});
