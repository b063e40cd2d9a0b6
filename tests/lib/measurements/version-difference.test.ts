import { describe, expect, it } from 'vitest';
import { differenceOf } from '@/lib/measurements/version-difference';

const before = { kappa: [0.1, 0.2, 0.3, 0.4], S: [1, 2, 3, 4], sigma: [0.5, 0.5, 0.5, 0.5] };

describe('what a later version changed', () => {
  it('is nothing where the points are the same up to rounding', () => {
    const after = {
      ...before,
      kappa: before.kappa.map((k) => k * (1 + 1e-12)),
      S: [1, 2 * (1 + 1e-15), 3, 4],
    };
    expect(differenceOf(before, after)).toEqual({ shared: 4, added: 0, removed: 0, moved: [] });
  });

  it('tells bins that came, went and moved, in units of the later error', () => {
    const after = { kappa: [0.05, 0.1, 0.3, 0.4], S: [9, 1, 2.5, 4], sigma: [1, 0.5, 0.25, 1] };
    const { shared, added, removed, moved } = differenceOf(before, after);
    expect([shared, added, removed]).toEqual([3, 1, 1]);
    expect(moved).toEqual([
      { kappa: 0.3, before: 3, after: 2.5, inSigma: -2, errorRatio: 0.5 },
      { kappa: 0.4, before: 4, after: 4, inSigma: 0, errorRatio: 2 },
    ]);
  });

  it('finds nothing moved among values that are withheld in both', () => {
    const blind = { ...before, S: [NaN, NaN, NaN, NaN] };
    expect(differenceOf(blind, blind).moved).toEqual([]);
  });
});
