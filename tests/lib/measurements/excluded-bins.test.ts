import { describe, expect, it } from 'vitest';
import { applyCuts, carryExcluded, keptBins, MeasurementError } from '@/lib/measurements';

const edges = [0.01, 0.02, 0.04, 0.08, 0.16];
const bins = {
  kappa: Float64Array.of(0.014, 0.028, 0.056, 0.112),
  kappaLo: Float64Array.from(edges.slice(0, 4)),
  kappaHi: Float64Array.from(edges.slice(1)),
};
const bare = { ...bins, kappaLo: null, kappaHi: null };
const why = 'beam not modelled';

describe('cuts on single bins', () => {
  it('keep what lies inside the range and is not left out, counted from 1', () => {
    expect(keptBins(bins, { excluded: [{ bin: 2 }] })).toEqual([0, 2, 3]);
    expect(keptBins(bins, { kappaMin: 0.02, excluded: [{ bin: 1 }, { bin: 4 }] })).toEqual([1, 2]);
  });

  it('refuse to leave out the last bin', () => {
    const all = [1, 2, 3, 4].map((bin) => ({ bin }));
    expect(() => keptBins(bins, { excluded: all })).toThrow(MeasurementError);
  });

  it('take rows and columns out of the covariance before anything inverts it', () => {
    const covariance = Float64Array.from(
      { length: 16 },
      (_, k) => 10 * (Math.floor(k / 4) + 1) + (k % 4) + 1,
    );
    const measurement = {
      ...bins,
      S: Float64Array.of(1, 2, 3, 4),
      sigma: null,
      order: Int32Array.of(3, 2, 1, 0),
    };
    const cut = applyCuts(measurement, covariance, { excluded: [{ bin: 1 }, { bin: 3 }] });
    expect([...cut.measurement.S]).toEqual([2, 4]);
    expect([...cut.covariance]).toEqual([22, 24, 42, 44]);
    expect([...cut.measurement.order]).toEqual([2, 0]);
  });
});

describe('bins left out, on another version', () => {
  it('get the place of their bin: its edges, or κ twice', () => {
    expect(carryExcluded(bins, [{ bin: 3, reason: why }]).excluded).toEqual([
      { bin: 3, reason: why, kappa: [0.04, 0.08] },
    ]);
    expect(carryExcluded(bare, [{ bin: 3, reason: why }]).excluded[0].kappa).toEqual([0.056, 0.056]);
  });

  it('are found by their edges within 1e-9, whatever their number is there', () => {
    const kappa: [number, number] = [0.04 * (1 + 5e-10), 0.08 * (1 - 5e-10)];
    expect(carryExcluded(bins, [{ bin: 9, reason: why, kappa }]).excluded).toEqual([
      { bin: 3, reason: why, kappa: [0.04, 0.08] },
    ]);
  });

  it('are dropped where no bin has those edges, or where one is named twice', () => {
    const moved = { bin: 3, reason: why, kappa: [0.04 * (1 + 3e-9), 0.08] as [number, number] };
    expect(carryExcluded(bins, [moved])).toEqual({ excluded: [], dropped: [moved] });
    const twice = [
      { bin: 2, reason: why },
      { bin: 2, reason: 'again' },
    ];
    expect(carryExcluded(bins, twice).dropped).toEqual([twice[1]]);
    expect(carryExcluded(bins, [{ bin: 5, reason: why }]).dropped).toHaveLength(1);
  });

  it('of triangles with one κ are told apart by their number', () => {
    const triangles = { kappa: Float64Array.of(0.1, 0.2, 0.2, 0.3), kappaLo: null, kappaHi: null };
    const kappa: [number, number] = [0.2, 0.2];
    expect(carryExcluded(triangles, [{ bin: 3, reason: why, kappa }]).excluded[0].bin).toBe(3);
    const both = [3, 2].map((bin) => ({ bin, reason: why, kappa }));
    expect(carryExcluded(triangles, both).excluded.map(({ bin }) => bin)).toEqual([2, 3]);
  });
});
