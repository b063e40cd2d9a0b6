import { describe, expect, it } from 'vitest';
import { shiftOf } from '@/lib/figures/shift';

describe('the shift of a median', () => {
  it('is the difference over the combined standard deviation, with the errors combined alike', () => {
    // Derived by us: 3-4-5 and 5-12-13 triangles.
    const moved = shiftOf({ median: 1, sd: 3, mcse: 0.5 }, { median: 11, sd: 4, mcse: 1.2 });
    expect(moved?.shift).toBe(2);
    expect(moved?.mcse).toBeCloseTo(1.3 / 5, 14);
    expect(shiftOf({ median: 11, sd: 3, mcse: null }, { median: 1, sd: 4, mcse: 1 })).toEqual({
      shift: -2,
      mcse: null,
    });
  });

  it('has no value where neither posterior has a width', () => {
    expect(shiftOf({ median: 1, sd: 0, mcse: 0 }, { median: 2, sd: 0, mcse: 0 })).toBeNull();
    expect(shiftOf({ median: 1, sd: Infinity, mcse: 0 }, { median: 2, sd: 0, mcse: 0 })).toBeNull();
  });
});
