import { describe, expect, it } from 'vitest';
import { scaleOf } from '@/lib/figures/scales';

describe('scales of a chart', () => {
  it('put both ends of the domain at both ends of the range, and the middle between', () => {
    const y = scaleOf({ domain: [-3, 3], range: [300, 100] });
    expect([y(-3), y(0), y(3), y(6)]).toEqual([300, 200, 100, 0]);
  });

  it('put the geometric mean in the middle of a logarithmic axis', () => {
    const x = scaleOf({ domain: [0.01, 1], range: [40, 240], scale: 'log' });
    expect(x(0.1)).toBeCloseTo(140, 9);
    expect(x(0.01)).toBe(40);
    expect(x(1)).toBe(240);
  });

  it('have no place for what is not finite, not positive on a logarithm, or on an axis without length', () => {
    const log = scaleOf({ domain: [0.01, 1], range: [0, 1], scale: 'log' });
    expect([log(0), log(-1), log(NaN)]).toEqual([NaN, NaN, NaN]);
    expect(scaleOf({ domain: [2, 2], range: [0, 1] })(2)).toBeNaN();
  });
});
