import { describe, expect, it } from 'vitest';
import { aliasesOf, chiSquareTail, fTail, spectralWindow, upcrossingTail } from '@/lib/inference/scan';
import { climb, maximise } from '@/lib/inference/scan/maximise';

describe('tails', () => {
  // scipy’s chi2.sf.
  it.each([
    [1, 1, 0.31731050786291115],
    [9, 1, 0.0026997960632601883],
    [30, 1, 4.3204630578274955e-8],
    [9, 2, 0.011108996538242306],
    [7.5, 3, 0.0575584519726364],
    [20, 4, 0.0004993992273873336],
  ])('χ² %d with %i degrees of freedom', (x, q, expected) => {
    expect(chiSquareTail(x, q) / expected).toBeCloseTo(1, 9);
  });

  it('F from its closed form for two degrees of freedom: (1 + 2f/d)^(−d/2)', () => {
    for (const f of [0.3, 2, 9]) expect(fTail(f, 2, 25)).toBeCloseTo((1 + (2 * f) / 25) ** -12.5, 12);
  });

  it('upcrossings: the local tail where nothing crosses, and the stated power law', () => {
    expect(upcrossingTail(9, 2, 1, 0)).toBe(chiSquareTail(9, 2));
    expect(upcrossingTail(9, 2, 1, 2)).toBeCloseTo(Math.exp(-4.5) + 2 * 3 * Math.exp(-4), 12);
  });
});

describe('spectral window and aliases', () => {
  it('the transform and the direct sum agree, and the window is 1 at 0 and at the sampling frequency', () => {
    const x = Float64Array.from({ length: 20 }, (_, i) => -4 + 0.25 * i);
    const w = x.map((_, i) => 1 + 0.5 * Math.sin(i));
    const fast = spectralWindow(x, w, 30);
    const moved = Float64Array.from(x);
    moved[10] += 1e-6;
    const slow = spectralWindow(moved, w, 30, 3001);
    const at = (mu: number): number => slow.power[Math.round(mu / 0.01)];
    expect(fast.power[0]).toBeCloseTo(1, 12);
    fast.mu.forEach((mu, k) => {
      if (Math.abs(mu / 0.01 - Math.round(mu / 0.01)) < 0.02) expect(fast.power[k]).toBeCloseTo(at(mu), 2);
    });
    const turn = (2 * Math.PI) / 0.25;
    const nearest = fast.mu.reduce(
      (best, mu, k) => (Math.abs(mu - turn) < Math.abs(fast.mu[best] - turn) ? k : best),
      0,
    );
    expect(fast.power[nearest]).toBeGreaterThan(0.99);
  });

  it('an alias is at |μ − 2πn/D|', () => {
    const spacing = 0.2834;
    const found = aliasesOf(4, spacing, 0.5, 40);
    expect(found[0]).toBeCloseTo((2 * Math.PI) / spacing - 4, 10);
    expect(found).toHaveLength(2);
  });
});

describe('maxima', () => {
  it('of one number to 1e-8', () => {
    const found = maximise((x) => -Math.cosh(x - Math.SQRT2), 0, 4, 1e-9);
    expect(Math.abs(found.at - Math.SQRT2)).toBeLessThan(2e-8);
  });

  it('of two numbers, from outside the region of negative curvature', () => {
    const f = (x: number, y: number): number =>
      Math.exp(-((x - 1.2) ** 2) - 2 * (y - 2.7) ** 2 - 0.8 * (x - 1.2) * (y - 2.7));
    const found = climb(
      f,
      [0.2, 2],
      [
        [0, 5],
        [0, 5],
      ],
      0.02,
    );
    expect(found.at[0]).toBeCloseTo(1.2, 7);
    expect(found.at[1]).toBeCloseTo(2.7, 7);
  });
});
