import { describe, expect, it } from 'vitest';
import { summarise, summariseCircle, wrap } from '@/lib/sampler';

describe('summaries', () => {
  it('give mean, sd with divisor n − 1 and quantiles of type 7 over all replicas together', () => {
    const found = summarise([Float64Array.of(4, 1, 3), Float64Array.of(2, 10)]);
    expect(found.mean).toBe(4);
    expect(found.sd).toBeCloseTo(Math.sqrt(50 / 4), 14);
    expect(found.q50).toBe(3);
    expect(found.q2_5).toBeCloseTo(1.1, 14);
    expect(found.q16).toBeCloseTo(1.64, 14);
    expect(found.q84).toBeCloseTo(4 + 0.36 * 6, 14);
    expect(found.q97_5).toBeCloseTo(4 + 0.9 * 6, 14);
  });

  it('keep the digits of a small spread on a large offset', () => {
    const found = summarise([Float64Array.of(1e8 + 0.25, 1e8 + 0.5, 1e8 + 0.75)]);
    expect(found.mean).toBe(1e8 + 0.5);
    expect(found.sd).toBeCloseTo(0.25, 12);
  });

  it('have no value without draws or with one that is NaN', () => {
    expect(summarise([]).mean).toBeNaN();
    const found = summarise([Float64Array.of(1, NaN, 2)]);
    expect([found.mean, found.sd, found.q50, found.q97_5]).toEqual([NaN, NaN, NaN, NaN]);
  });

  it('put the mean of phases on either side of the cut at the cut', () => {
    const found = summariseCircle([Float64Array.of(3, -3, 2.9, -2.9)], 2 * Math.PI);
    expect(Math.abs(found.mean)).toBeCloseTo(Math.PI, 12);
    const spread = (Math.cos(Math.PI - 3) + Math.cos(Math.PI - 2.9)) / 2;
    expect(found.resultant).toBeCloseTo(spread, 12);
    expect(found.sd).toBeCloseTo(Math.sqrt(-2 * Math.log(spread)), 12);
  });

  it('take the period of the circle from the caller', () => {
    const found = summariseCircle([Float64Array.of(0.2, 0.4)], 1);
    expect(found.mean).toBeCloseTo(0.3, 12);
    expect(summariseCircle([Float64Array.of(0.5, 0.5)], 1)).toEqual({ mean: 0.5, resultant: 1, sd: 0 });
    expect(summariseCircle([], 1).resultant).toBeNaN();
  });
});

describe('a coordinate on a circle', () => {
  it.each([
    [0, 2, 0],
    [1, 2, 1],
    [-1, 2, 1],
    [1.25, 2, -0.75],
    [-7.5, 2, 0.5],
    [1e6 + 0.5, 1, 0.5],
  ])('%d on a circle of %d is %d', (value, period, expected) => {
    expect(wrap(value, period)).toBe(expected);
  });

  it('stays within half a period whatever the rounding', () => {
    for (let k = -50; k < 50; k++) {
      for (const value of [(k + 0.5) * 2 * Math.PI, k * 2 * Math.PI + Math.PI * (1 + 1e-15)]) {
        const wrapped = wrap(value, 2 * Math.PI);
        expect(wrapped > -Math.PI && wrapped <= Math.PI).toBe(true);
      }
    }
  });
});
