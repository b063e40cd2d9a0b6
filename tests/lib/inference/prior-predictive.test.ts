import { describe, expect, it } from 'vitest';
import { predictiveBand, priorPredictive } from '@/lib/inference/prior-predictive';
import { compileTemplate } from '@/lib/templates';

describe('a band of predictions', () => {
  it('has the pointwise quantiles of type 7', () => {
    // 0, 1, …, 100: the p-quantile of type 7 is 100 p.
    const predictions = Array.from({ length: 101 }, (_, i) => Float64Array.of(100 - i, i));
    const band = predictiveBand(predictions);
    expect(band.lo95[0]).toBeCloseTo(2.5, 12);
    expect(band.lo68[1]).toBeCloseTo(16, 12);
    expect(band.hi68[0]).toBeCloseTo(84, 12);
    expect(band.hi95[1]).toBeCloseTo(97.5, 12);
  });
});

describe('the prior predictive band', () => {
  const kappa = Float64Array.of(0.1, 1);
  const template = compileTemplate(
    'background',
    { background: [1], binAverage: false },
    { kind: 'points', kappa },
  );

  it('follows the prior of a linear coefficient: ± its quantiles times κ', () => {
    const { hi68, lo68, hi95 } = priorPredictive(
      template,
      { c1: { kind: 'normal', mean: 0, sd: 2 } },
      20_000,
    );
    // Quantiles of the normal, 0.99446 and 1.95996; Monte Carlo error of these below 0.03 at κ = 1.
    expect(Math.abs(hi68[1] - 2 * 0.99446)).toBeLessThan(0.1);
    expect(Math.abs(hi95[1] - 2 * 1.95996)).toBeLessThan(0.15);
    expect(lo68[0] / lo68[1]).toBeCloseTo(0.1, 12);
  });

  it('is the same for the same seed', () => {
    const priors = { c1: { kind: 'uniform', lo: -1, hi: 1 } } as const;
    expect(priorPredictive(template, priors, 50)).toEqual(priorPredictive(template, priors, 50));
  });

  it('refuses a prior that is none', () => {
    expect(() => priorPredictive(template, { c1: { kind: 'normal', mean: 0, sd: -1 } })).toThrow(/sd/);
  });
});
