import { describe, expect, it } from 'vitest';
import { beatPath, tonePath } from '@/lib/figures/beat';
import { toCsv } from '@/lib/figures/csv';
import { areaPath, linePath, markerPath } from '@/lib/figures/paths';
import { thinnedIndices } from '@/lib/figures/thin';

describe('path data', () => {
  it('runs through the points with a tenth of a pixel', () => {
    expect(linePath([0, 1.26, 2], [3, 4, 5.04])).toBe('M0 3L1.3 4L2 5');
  });

  it('is interrupted where a coordinate is missing', () => {
    expect(linePath([0, 1, 2, 3], [0, NaN, 2, 3])).toBe('M0 0M2 2L3 3');
  });

  it('of an area goes along the upper line and back along the lower one', () => {
    expect(areaPath([0, 1], [2, 3], [5, 6])).toBe('M0 2L1 3L1 6L0 5Z');
    expect(areaPath([0], [1], [2])).toBe('');
  });

  it('gives each of four fields a marker of its own', () => {
    expect(new Set([0, 1, 2, 3].map((field) => markerPath(field, 10, 10, 3))).size).toBe(4);
  });

  it('of a beat that starts at a node begins and ends in the middle', () => {
    const { carrier } = beatPath({ width: 39, height: 14, carriers: 5.5, beats: 2, start: 'node' });
    expect(carrier).toMatch(/^M0 7L/);
    expect(carrier).toMatch(/L39 7$/);
    expect(tonePath(720, 18, 30)).toMatch(/^M0 0L/);
  });
});

describe('thinning a trace', () => {
  it('keeps each excursion', () => {
    const trace = new Float64Array(10_000);
    trace[4321] = 9;
    trace[8765] = -7;
    const kept = thinnedIndices(trace, 200);
    expect(kept.length).toBeLessThanOrEqual(200);
    expect(kept).toContain(4321);
    expect(kept).toContain(8765);
    expect(kept).toEqual([...kept].sort((a, b) => a - b));
  });

  it('leaves a short one as it is', () => {
    expect(thinnedIndices([5, 4, 3], 10)).toEqual([0, 1, 2]);
  });
});

describe('numbers as CSV', () => {
  it('keep full precision, quote text that needs it and leave unknown cells empty', () => {
    expect(
      toCsv({
        columns: ['kappa', 'field 1, lower'],
        rows: [
          [0.1 + 0.2, null],
          [-1e-7, NaN],
        ],
      }),
    ).toBe('kappa,"field 1, lower"\n0.30000000000000004,\n-1e-7,\n');
  });
});
