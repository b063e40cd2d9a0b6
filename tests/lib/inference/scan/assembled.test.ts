import { describe, expect, it } from 'vitest';
import { assemble, buildInference, type Assembly, type InferenceSpec } from '@/lib/inference';
import { buildCollapsedModel, runScan } from '@/lib/inference/scan';
import type { Prior } from '@/lib/templates';
import { bruteForce, posterior } from '../brute-force';
import { binned, madeUpData } from '../fixtures';

const normal = (sd: number): Prior => ({ kind: 'normal', mean: 0, sd });

/** Each value sees a tenth of its neighbours' theory. */
const smear = Float64Array.from({ length: 256 }, (_, k) => {
  const distance = Math.abs(Math.floor(k / 16) - (k % 16));
  return distance === 0 ? 0.8 : distance === 1 ? 0.1 : 0;
});
const tilt = Float64Array.from({ length: 16 }, (_, i) => 0.3 * Math.sin(0.9 * i + 1));
const priors = { a1: normal(0.3), b1: normal(0.3), tilt: normal(0.4), tilt_1: normal(0.4) };

/** Two measurements, one through a window and with a column, each with mocks of its own where `mocks` says so. */
function specOf(mocks: readonly (number | null)[], likelihood: Assembly['likelihood']): InferenceSpec {
  const parts = mocks.map((mockCount, k) => ({
    label: `part ${k + 1}`,
    axis: binned,
    data: madeUpData(0.05 + 0.03 * k, mockCount),
    ...(k === 0 ? { window: smear, columns: [{ name: 'tilt', values: tilt }] } : {}),
  }));
  const made = {
    parts,
    template: { id: 'free-phase', options: { fields: 1, background: [] } },
    likelihood,
  };
  const { template } = assemble({ ...made, priors: {} });
  const own: Record<string, Prior> = { ...priors, mu1: { kind: 'uniform', lo: 0.5, hi: 6 } };
  return assemble({
    ...made,
    priors: Object.fromEntries(template.parameters.map(({ name }) => [name, own[name]])),
  });
}

describe('a scan through a window, with a column', () => {
  it.each([
    ['one measurement, normal', [null], 'normal'],
    ['one measurement with mocks', [45], 'sellentin-heavens'],
    ['two with mocks of their own', [45, 60], 'sellentin-heavens'],
    ['one with mocks and one with a known covariance', [45, null], 'sellentin-heavens'],
    ['two with Hartlap’s factors of their own', [45, 60], 'hartlap'],
  ] as const)('has the log evidence of brute-force quadrature to 1e-9: %s', (_, mocks, likelihood) => {
    const spec = specOf(mocks, likelihood);
    const exact = buildCollapsedModel(spec).logEvidence([2.1], 1) ?? NaN;
    const { f, names } = posterior(spec, [2.1]);
    expect(names).toEqual(['a1', 'b1', mocks.length === 1 ? 'tilt' : 'tilt_1']);
    const brute = bruteForce(f, [
      { lo: -1.5, hi: 1.5, n: 66 },
      { lo: -1.5, hi: 1.5, n: 66 },
      { lo: -1.2, hi: 1.2, n: 80 },
    ]);
    expect(Math.abs(exact - brute)).toBeLessThan(1e-9);
  });

  it('maximises the likelihood that is sampled: no step in any coefficient raises it', () => {
    const spec = specOf([45, 60], 'sellentin-heavens');
    const { coefficients, logLikelihood } = buildCollapsedModel(spec).fit([2.1]);
    const { target } = buildInference(spec);
    const at = (c: Float64Array): number => target.logLikelihood(Float64Array.of(2.1, ...c));
    expect(at(coefficients)).toBeCloseTo(logLikelihood, 9);
    for (let i = 0; i < 3; i += 1) {
      for (const step of [-1e-4, 1e-4]) {
        const moved = Float64Array.from(coefficients);
        moved[i] += step;
        expect(at(moved)).toBeLessThan(logLikelihood);
      }
    }
  });
});

it('quotes no p where several sets of mocks stand behind the covariance, and one where it is known', () => {
  const scan = (mocks: readonly (number | null)[], likelihood: Assembly['likelihood']) => {
    const one = specOf(mocks, likelihood);
    const kept = Array.from(one.data.S.keys());
    return runScan({
      one,
      two: null,
      axes: mocks.map(() => binned),
      muMin: 0.5,
      muMax: 6,
      nulls: 50,
      source: { covariance: one.data.covariance, rows: kept.length, kept, mocks: one.data.mockCount },
      seed: 'assembled',
    });
  };
  const several = scan([45, 60], 'sellentin-heavens');
  expect([several.localP, several.nulls, several.globalPUpcrossing]).toEqual([null, null, null]);
  expect(several.line.best.deltaChi2).toBeGreaterThan(0);
  const known = scan([null, null], 'normal');
  expect(known.localP).toBeGreaterThan(0);
  expect(known.nulls?.heights.length).toBe(50);
  expect(known.window.power.every(Number.isFinite)).toBe(true);
});
