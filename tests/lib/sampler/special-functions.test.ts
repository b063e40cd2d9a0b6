import { describe, expect, it } from 'vitest';
import { betaProbability, betaQuantile, logGamma, normalQuantile } from '@/lib/sampler';

/** Reference values derived by us at 60 decimal digits: series and continued fraction of erfc, finite binomial sums, products. */
const NORMAL = [
  [0.4, -0.2533471031357998],
  [0.025, -1.9599639845400542],
  [0.001, -3.0902323061678135],
  [1e-10, -6.361340902404056],
  [1e-100, -21.273453560965324],
] as const;

const BETA = [
  [0.1586553, 2, 3, 0.18530113734156409],
  [0.8413447, 21, 381, 0.06326354841701732],
  [0.1586553, 5001, 15001, 0.24696322121531285],
  [0.99, 500, 40, 0.9497547975973282],
] as const;

const LOG_GAMMA = [
  [0.5, 0.5723649429247001],
  [3.5, 1.2009736023470743],
  [10.5, 13.940625219403763],
  [100.5, 361.4355404677776],
  [171, 706.5730622457873],
] as const;

describe('special functions', () => {
  it.each(NORMAL)('the normal quantile at %d is right to 1e-13 on both sides', (p, z) => {
    expect(Math.abs(normalQuantile(p) / z - 1)).toBeLessThan(1e-13);
    if (p > 1e-3) expect(Math.abs(normalQuantile(1 - p) / -z - 1)).toBeLessThan(1e-12);
  });

  it.each(BETA)('the beta quantile at %d of (%d, %d) is right to 1e-12', (p, a, b, x) => {
    expect(Math.abs(betaQuantile(p, a, b) / x - 1)).toBeLessThan(1e-12);
    expect(Math.abs(betaProbability(x, a, b) / p - 1)).toBeLessThan(1e-11);
  });

  it.each(LOG_GAMMA)('the log gamma function at %d is right to 1e-14', (x, value) => {
    expect(Math.abs(logGamma(x) / value - 1)).toBeLessThan(1e-14);
  });

  it('the beta quantile inverts the probability for shapes from 1 to a million', () => {
    for (const a of [1, 7.5, 400, 2e4, 1e6]) {
      for (const b of [1, 7.5, 400, 2e4, 1e6]) {
        for (const p of [0.01, 0.1586553, 0.5, 0.8413447, 0.99]) {
          expect(Math.abs(betaProbability(betaQuantile(p, a, b), a, b) / p - 1)).toBeLessThan(1e-9);
        }
      }
    }
  });

  it('the beta distribution mirrors when its shapes are exchanged', () => {
    for (const x of [0.01, 0.3, 0.7]) {
      expect(betaProbability(x, 3.2, 8.1) + betaProbability(1 - x, 8.1, 3.2)).toBeCloseTo(1, 14);
    }
  });

  it('nothing has a value outside its domain, and the ends are exact', () => {
    expect(normalQuantile(0)).toBe(-Infinity);
    expect(normalQuantile(1)).toBe(Infinity);
    expect(normalQuantile(-0.1)).toBeNaN();
    expect(normalQuantile(NaN)).toBeNaN();
    expect(betaQuantile(0, 2, 3)).toBe(0);
    expect(betaQuantile(1, 2, 3)).toBe(1);
    expect(betaQuantile(0.5, -1, 3)).toBeNaN();
    expect(betaProbability(1.5, 2, 3)).toBeNaN();
    expect(logGamma(0)).toBeNaN();
    expect(logGamma(-0.5)).toBeNaN();
  });
});
