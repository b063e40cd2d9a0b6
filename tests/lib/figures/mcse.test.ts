import { describe, expect, it } from 'vitest';
import { decimalsByMcse, formatNumber } from '@/lib/figures/format';
import { quantileMcse, weakness } from '@/lib/figures/mcse';
import { quantileOfSorted, sortedFinite } from '@/lib/figures/quantiles';
import { normalPairs } from './normal-pairs';

describe('the Monte Carlo error of a quantile', () => {
  it.each([0.5, 0.16, 0.025] as const)(
    'is the scatter of the %f quantile over 400 sets of 1 000 normal draws',
    (p) => {
      const found = Float64Array.from({ length: 400 }, (_, seed) =>
        quantileOfSorted(sortedFinite(normalPairs(1000, 0, seed + 1).x), p),
      );
      const mean = found.reduce((sum, v) => sum + v, 0) / found.length;
      const scatter = Math.sqrt(found.reduce((sum, v) => sum + (v - mean) ** 2, 0) / (found.length - 1));
      const told = quantileMcse(p, { sd: 1, mcseMean: 1 / Math.sqrt(1000), essTail: 1000 });
      // The scatter of 400 values is known to 1/√800 = 3.5 %; four of these, and 2 % for a thousand draws not being many.
      expect(Math.abs(scatter / told - 1)).toBeLessThan(0.16);
    },
  );

  it('takes the ends from the tails where those are worth fewer draws', () => {
    const facts = { sd: 2, mcseMean: 0.02, essTail: 400 };
    expect(quantileMcse(0.025, facts) / quantileMcse(0.025, { ...facts, essTail: null })).toBeCloseTo(5, 9);
    expect(quantileMcse(0.5, facts)).toBe(quantileMcse(0.5, { ...facts, essTail: null }));
  });

  it('is unknown where its facts are, and nothing where nothing varies', () => {
    expect(quantileMcse(0.5, { sd: null, mcseMean: 0.1, essTail: 1 })).toBeNaN();
    expect(quantileMcse(0.5, { sd: 1, mcseMean: null, essTail: 1 })).toBeNaN();
    expect(quantileMcse(0.5, { sd: 0, mcseMean: 0, essTail: null })).toBe(0);
  });
});

describe('digits by Monte Carlo error', () => {
  it('are never finer than twice it, and never coarser than ten times what it allows, over 3 000 values', () => {
    for (let k = 0; k < 3000; k++) {
      const error = 10 ** (-5 + (k % 601) / 100);
      const value = Math.sin(k) * 10 ** ((k % 7) - 3);
      const decimals = decimalsByMcse(error);
      const step = 10 ** -decimals;
      expect(step).toBeGreaterThanOrEqual(2 * error * (1 - 1e-8));
      expect(step / 10).toBeLessThan(2 * error * (1 + 1e-8));
      const text = formatNumber(value, decimals);
      const read = Number(text.replace('\u2212', '-').replace(/\u202f/g, ''));
      expect(Math.abs(read - value)).toBeLessThanOrEqual((step / 2) * (1 + 1e-9));
    }
  });
});

describe('a weak quantity', () => {
  const strong = { sd: 1, mcseMean: 0.01, q16: -1, q84: 1 };

  it('is one whose error is as large as its interval, or isn’t known', () => {
    expect(weakness(strong)).toBeNull();
    expect(weakness({ ...strong, mcseMean: 0.49 })).toBeNull();
    expect(weakness({ ...strong, mcseMean: 0.5 })).toMatch(/^twice its Monte Carlo error/);
    expect(weakness({ ...strong, mcseMean: null })).toMatch(/for a Monte Carlo error$/);
    expect(weakness({ ...strong, q16: null })).toBe('too few draws are kept');
  });

  it('is none that never varies', () => {
    expect(weakness({ sd: 0, mcseMean: 0, q16: 2, q84: 2 })).toBeNull();
  });
});
