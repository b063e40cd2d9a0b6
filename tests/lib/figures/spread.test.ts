import { describe, expect, it } from 'vitest';
import { spread } from '@/lib/figures/spread';

describe('labels that stand too close', () => {
  it('stay where there is room', () => {
    expect(spread([10, 40, 100], 15)).toEqual([10, 40, 100]);
  });

  it('move apart round their mean, in their order', () => {
    expect(spread([52, 50], 15)).toEqual([58.5, 43.5]);
    expect(spread([50, 50, 50], 10)).toEqual([40, 50, 60]);
  });

  it('push on their neighbours', () => {
    const moved = spread([20, 24, 36], 15);
    expect(moved[1] - moved[0]).toBeCloseTo(15, 12);
    expect(moved[2] - moved[1]).toBeCloseTo(15, 12);
    expect((moved[0] + moved[1] + moved[2]) / 3).toBeCloseTo(80 / 3, 12);
  });

  it('leave out what has no place', () => {
    expect(spread([NaN, 5], 15)).toEqual([NaN, 5]);
  });
});
