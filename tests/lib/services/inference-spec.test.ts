import { describe, expect, it } from 'vitest';
import { noTheory } from '@/lib/services/stored-theory';
import { AppError } from '@/lib/errors';
import { cutPoints, inferenceSpec, readPoints, writeDoubles } from '@/lib/services/inference-spec';
import type { NotebookSettings } from '@/models';

/** A buffer whose bytes begin at no multiple of 8, as a database driver hands it out. */
const shifted = (bytes: Buffer): Buffer => Buffer.concat([Buffer.alloc(3), bytes]).subarray(3);

const lo = Float64Array.of(0.01, 0.02, 0.04);
const hi = Float64Array.of(0.02, 0.04, 0.08);
const kappa = Float64Array.of(0.014, 0.029, 0.05);
const S = Float64Array.of(0.1, -0.25, 1 / 3);
const covariance = Float64Array.of(2, 0.1, 0.2, 0.1, 3, 0.3, 0.2, 0.3, 4);
const none = new Float64Array(3).fill(NaN);
const version = {
  rows: 3,
  hasBinEdges: true,
  mockCount: null,
  points: shifted(writeDoubles(kappa, lo, hi, S)),
  covariance: shifted(writeDoubles(covariance)),
  theory: null,
};
const withoutEdges = { ...version, hasBinEdges: false, points: writeDoubles(kappa, none, none, S) };
const settings: NotebookSettings = {
  cuts: {},
  likelihood: { kind: 'normal' },
  template: { id: 'background', version: 1, options: { background: [1] } },
  priors: { c1: { kind: 'normal', mean: 0, sd: 1 } },
};
const withOptions = (options: Record<string, unknown>): NotebookSettings => ({
  ...settings,
  template: { ...settings.template, options: { background: [1], ...options } },
});
const fault = (run: () => unknown): AppError => {
  try {
    run();
  } catch (error) {
    if (error instanceof AppError) return error;
    throw error;
  }
  throw new Error('nothing was thrown');
};

describe('stored numbers', () => {
  it('come back in every bit from bytes that begin anywhere', () => {
    expect(readPoints(version)).toEqual({
      kappa,
      kappaLo: lo,
      kappaHi: hi,
      S,
      covariance,
      theory: noTheory,
    });
  });

  it('are little-endian float64, whatever the machine', () => {
    expect(writeDoubles(Float64Array.of(1, -2)).toString('hex')).toBe('000000000000f03f00000000000000c0');
  });

  it('have no edges where the measurement has none', () => {
    expect(readPoints(withoutEdges)).toMatchObject({ kappaLo: null, kappaHi: null });
  });

  it('of a wrong length are a fault of ours', () => {
    expect(() => readPoints({ ...version, rows: 4 })).toThrow(/96 bytes where 128 are due/);
  });
});

describe('cuts', () => {
  it('keep bins that lie inside to a relative 1e-9, with their part of the covariance', () => {
    const cut = cutPoints(version, { kappaMin: 0.02 * (1 + 5e-10), kappaMax: 0.08 });
    expect(cut.kept).toEqual([1, 2]);
    expect([...cut.S]).toEqual([-0.25, 1 / 3]);
    expect([...cut.covariance]).toEqual([3, 0.3, 0.3, 4]);
    expect(cutPoints(version, { kappaMin: 0.02 * (1 + 2e-9) }).kept).toEqual([2]);
  });

  it('that keep nothing are invalid at `cuts`', () => {
    const error = fault(() => cutPoints(version, { kappaMax: 0.011 }));
    expect(error).toMatchObject({ code: 'invalid', details: [{ path: 'cuts' }] });
    expect(error.message).toMatch(/Widen the cut/);
  });
});

describe('the axis', () => {
  it('is bins where there are edges, uniform in ln κ unless a weight is given', () => {
    expect(inferenceSpec(version, settings).axis).toEqual({ kind: 'bins', lo, hi, weightPower: 0 });
    expect(inferenceSpec(version, withOptions({ binWeight: 3 })).axis).toMatchObject({ weightPower: 3 });
  });

  it('is the κ column without bin averages or without edges', () => {
    expect(inferenceSpec(version, withOptions({ binAverage: false })).axis).toEqual({
      kind: 'points',
      kappa,
    });
    expect(inferenceSpec(withoutEdges, settings).axis).toEqual({ kind: 'points', kappa });
  });

  it('can’t be bins where there are no edges', () => {
    const error = fault(() => inferenceSpec(withoutEdges, withOptions({ binAverage: true })));
    expect(error).toMatchObject({ code: 'invalid', details: [{ path: 'template.options.binAverage' }] });
  });

  it('is what the template is compiled on: c κ at the points, its mean ln-uniform over the bins', () => {
    const atPoints = inferenceSpec(withoutEdges, settings).spec.template.predict([2]);
    atPoints.forEach((value, i) => expect(value).toBeCloseTo(2 * kappa[i], 14));
    const inBins = inferenceSpec(version, settings).spec.template.predict([2]);
    inBins.forEach((value, i) => {
      expect(value).toBeCloseTo((2 * (hi[i] - lo[i])) / Math.log(hi[i] / lo[i]), 14);
    });
  });
});
