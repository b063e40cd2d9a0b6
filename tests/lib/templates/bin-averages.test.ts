import { describe, expect, it } from 'vitest';
import { oscillationColumns, powerColumn, validateAxis } from '@/lib/templates';
import type { Axis } from '@/lib/templates';
import { binMeanByQuadrature } from './gauss-legendre';

const equal = (n: number, lo: number, width: number, weightPower = 0): Extract<Axis, { kind: 'bins' }> => ({
  kind: 'bins',
  lo: Float64Array.from({ length: n }, (_, i) => lo * Math.exp(width * i)),
  hi: Float64Array.from({ length: n }, (_, i) => lo * Math.exp(width * (i + 1))),
  weightPower,
});

const uneven = (weightPower = 0): Extract<Axis, { kind: 'bins' }> => ({
  kind: 'bins',
  lo: Float64Array.of(0.001, 0.0013, 0.01, 0.0100001, 0.3),
  hi: Float64Array.of(0.0013, 0.009, 0.01000001, 0.2, 0.9),
  weightPower,
});

function fill(axis: Axis, mu: number, p?: number): [Float64Array, Float64Array] {
  const columns = oscillationColumns(axis, p);
  const out: [Float64Array, Float64Array] = [
    new Float64Array(columns.length),
    new Float64Array(columns.length),
  ];
  columns.fill(mu, out);
  return out;
}

describe('the columns of an oscillation', () => {
  const axes: [string, Extract<Axis, { kind: 'bins' }>][] = [
    ['equal widths', equal(40, 0.004, 0.12)],
    ['equal widths weighted with kappa squared', equal(12, 0.01, 0.3, 2)],
    [
      'widths that differ in the fifth digit, as edges rounded in a file do',
      { kind: 'bins', lo: Float64Array.of(0.01, 0.02), hi: Float64Array.of(0.02, 0.040002), weightPower: 0 },
    ],
    ['uneven widths', uneven()],
    ['uneven widths weighted with kappa cubed', uneven(3)],
    ['uneven widths with a negative weight', uneven(-1.5)],
  ];
  it.each(axes)('are the means of the curve over every bin to 1e-12 of its size: %s', (_, axis) => {
    for (const mu of [0, 0.01, 0.7, 3, 8, 40, 100]) {
      const [cosine, sine] = fill(axis, mu);
      axis.lo.forEach((lo, i) => {
        const hi = axis.hi[i];
        const mean = (f: (kappa: number) => number) => binMeanByQuadrature(f, lo, hi, axis.weightPower, mu);
        const size = Math.sqrt(hi);
        const slowCosine = mean((kappa) => Math.sqrt(kappa) * Math.cos(mu * Math.log(kappa)));
        const slowSine = mean((kappa) => Math.sqrt(kappa) * Math.sin(mu * Math.log(kappa)));
        expect(Math.abs(cosine[i] - slowCosine) / size).toBeLessThan(1e-12);
        expect(Math.abs(sine[i] - slowSine) / size).toBeLessThan(1e-12);
      });
    }
  });

  it('are the curve itself at points', () => {
    const kappa = Float64Array.of(0.001, 0.02, 0.5, 1);
    const [cosine, sine] = fill({ kind: 'points', kappa }, 4.2);
    kappa.forEach((k, i) => {
      expect(cosine[i]).toBeCloseTo(Math.sqrt(k) * Math.cos(4.2 * Math.log(k)), 14);
      expect(sine[i]).toBeCloseTo(Math.sqrt(k) * Math.sin(4.2 * Math.log(k)), 14);
    });
  });

  it('tend to the curve as the bin narrows, without a loss of digits', () => {
    for (const width of [1e-3, 1e-6, 1e-9, 1e-12]) {
      const kappa = 0.02;
      const axis = {
        kind: 'bins',
        lo: Float64Array.of(kappa),
        hi: Float64Array.of(kappa * (1 + width)),
      } as const;
      const [cosine] = fill({ ...axis, weightPower: 2 }, 3);
      const centre = Math.log(kappa) + 0.5 * Math.log1p(width);
      const value = Math.exp(centre / 2) * Math.cos(3 * centre);
      expect(Math.abs(cosine[0] / value - 1)).toBeLessThan(width * width * 10 + 1e-14);
    }
  });

  it('survive a bin so wide and so weighted that its exponentials would overflow', () => {
    const axis: Axis = { kind: 'bins', lo: Float64Array.of(1e-150), hi: Float64Array.of(1), weightPower: 10 };
    const [cosine, sine] = fill(axis, 2);
    // ∫ κ^{10.5 + 2i} d ln κ / ∫ κ^{10} d ln κ up to κ = 1 is 10/(10.5 + 2i).
    const square = 10.5 * 10.5 + 4;
    expect(Math.abs(cosine[0] - (10 * 10.5) / square)).toBeLessThan(1e-12);
    expect(Math.abs(sine[0] + (10 * 2) / square)).toBeLessThan(1e-12);
  });
});

describe('the columns of the background', () => {
  it.each([-1, 0, 1, 2, 3, 4])('are the means of kappa^%i over every bin', (p) => {
    for (const axis of [equal(20, 0.01, 0.2), uneven(), uneven(2), uneven(3)]) {
      const column = powerColumn(axis, p);
      axis.lo.forEach((lo, i) => {
        const slow = binMeanByQuadrature((kappa) => kappa ** p, lo, axis.hi[i], axis.weightPower, 0);
        expect(Math.abs(column[i] / slow - 1)).toBeLessThan(1e-12);
      });
    }
  });
  it('are kappa^p at points', () => {
    expect(
      [...powerColumn({ kind: 'points', kappa: Float64Array.of(0.5, 2) }, 2)].map((v) => v.toFixed(14)),
    ).toEqual(['0.25000000000000', '4.00000000000000']);
  });
});

describe('an axis', () => {
  const faults: [string, Axis, string][] = [
    ['no points', { kind: 'points', kappa: new Float64Array(0) }, 'axis.kappa'],
    ['a point at zero', { kind: 'points', kappa: Float64Array.of(0.1, 0) }, 'axis.kappa[1]'],
    ['a point that is not a number', { kind: 'points', kappa: Float64Array.of(NaN) }, 'axis.kappa[0]'],
    ['no bins', { ...equal(1, 0.1, 0.1), lo: new Float64Array(0) }, 'axis.lo'],
    ['unequal numbers of edges', { ...equal(2, 0.1, 0.1), hi: Float64Array.of(1) }, 'axis.hi'],
    ['a bin turned round', { ...equal(1, 0.1, 0.1), hi: Float64Array.of(0.05) }, 'axis.lo[0]'],
    ['an infinite edge', { ...equal(1, 0.1, 0.1), hi: Float64Array.of(Infinity) }, 'axis.lo[0]'],
    ['a weight that is not a number', { ...equal(1, 0.1, 0.1), weightPower: NaN }, 'axis.weightPower'],
  ];
  it.each(faults)('is refused with %s, and the place is named', (_, axis, path) => {
    expect(() => validateAxis(axis)).toThrow(
      expect.objectContaining({ name: 'TemplateError', code: 'invalid_axis', path }),
    );
  });
});
