import { describe, expect, it } from 'vitest';
import {
  bestDraw,
  buildInference,
  coverageFacts,
  InferenceError,
  posteriorBand,
  type InferenceSpec,
} from '@/lib/inference';
import { createRng } from '@/lib/sampler/rng';
import type { Prior } from '@/lib/templates';
import { binned, madeUpSpec } from './fixtures';
import { diagnoseAll, runReplicas } from './sampling';

const uniform = (lo: number, hi: number): Prior => ({ kind: 'uniform', lo, hi });
const good = (): InferenceSpec => madeUpSpec('free-phase', { fields: 2, background: [1, 2] });

function faultOf(change: (spec: InferenceSpec) => InferenceSpec): InferenceError {
  try {
    buildInference(change(good()));
  } catch (error) {
    if (error instanceof InferenceError) return error;
    throw error;
  }
  throw new Error('no fault was found');
}

const withPriors = (priors: Record<string, Prior>) => (spec: InferenceSpec) => ({
  ...spec,
  priors: { ...spec.priors, ...priors },
});
const withData = (data: Partial<InferenceSpec['data']>) => (spec: InferenceSpec) => ({
  ...spec,
  data: { ...spec.data, ...data },
});

describe('buildInference', () => {
  const skewed = good().data.covariance;
  skewed[1] *= 1.5;
  const singular = good().data.covariance;
  for (let j = 0; j < 16; j += 1) {
    singular[16 + j] = singular[j];
    singular[16 * j + 1] = singular[16 * j];
  }
  singular[17] = singular[0];
  const spoilt = good().data.S;
  spoilt[3] = NaN;
  const cases: [string, (spec: InferenceSpec) => InferenceSpec, string, string][] = [
    ['too short data', withData({ S: new Float64Array(5) }), 'data_length', 'data.S'],
    [
      'a covariance of another size',
      withData({ covariance: new Float64Array(9) }),
      'covariance_size',
      'data.covariance',
    ],
    ['a NaN', withData({ S: spoilt }), 'data_not_finite', 'data.S[3]'],
    [
      'an asymmetric covariance',
      withData({ covariance: skewed }),
      'covariance_not_symmetric',
      'data.covariance[1][0]',
    ],
    [
      'a singular covariance',
      withData({ covariance: singular }),
      'covariance_not_positive_definite',
      'data.covariance[1][1]',
    ],
    ['16 values with 20 mocks', withData({ mockCount: 20 }), 'too_few_mocks', 'data.mockCount'],
    [
      'a t likelihood without mocks',
      (spec) => ({ ...spec, likelihood: 'matched-t' }),
      'mock_count_missing',
      'data.mockCount',
    ],
    [
      'masses that cannot be in order',
      withPriors({ mu1: uniform(3, 4), mu2: uniform(1, 2) }),
      'prior_order_impossible',
      'priors.mu2',
    ],
    ['a prior out of range', withPriors({ mu2: uniform(1, 101) }), 'prior_outside_range', 'priors.mu2.hi'],
  ];
  it.each(cases)('refuses %s and names the place', (_, change, code, path) => {
    const fault = faultOf(change);
    expect(fault).toMatchObject({ code, path });
    expect(fault.remedy.length).toBeGreaterThan(5);
  });

  it('says how many mocks are needed', () => {
    expect(faultOf(withData({ mockCount: 20 })).message).toContain('at least 21 are needed');
    const with21 = withData({ mockCount: 21 });
    expect(() => buildInference({ ...with21(good()), likelihood: 'sellentin-heavens' })).not.toThrow();
    // The matched exponent of 8 parameters reaches 16 data values at 23 mocks: m(22) = 15.8, m(23) = 17.5.
    const matched = faultOf((spec) => ({ ...with21(spec), likelihood: 'matched-t' }));
    expect(matched.message).toContain('and 23 for the matched-prior t likelihood of 8 parameters');
    const with23 = withData({ mockCount: 23 });
    expect(() => buildInference({ ...with23(good()), likelihood: 'matched-t' })).not.toThrow();
  });

  it('refuses a missing prior, nothing to sample and an isotropic prior on one angle of two', () => {
    const spec = madeUpSpec('locked-squeezed', { fields: 3, background: [1] }, { theta13: uniform(0, 1) });
    expect(() => buildInference(spec)).toThrow(
      'the isotropic prior is one density of all mixing angles together',
    );
    const missing = good();
    expect(() => buildInference({ ...missing, priors: {} })).toThrow('mu1 has no prior');
    const background = madeUpSpec('background', { background: [1] }, { c1: { kind: 'fixed', value: 1 } });
    expect(() => buildInference(background)).toThrow('every parameter is fixed');
  });

  it('takes fixed parameters out of the sampled ones, out of the prior and into the prediction', () => {
    const fixed: Prior = { kind: 'fixed', value: 2.5 };
    const inference = buildInference(withPriors({ mu2: fixed, c1: { kind: 'fixed', value: 0.2 } })(good()));
    expect(inference.target.names).toEqual(['mu1', 'a1', 'b1', 'a2', 'b2', 'c2']);
    expect(inference.blocks).toEqual([[0, 1, 2], [3, 4], [5]]);
    const full = inference.expand([1, 2, 3, 4, 5, 6]);
    expect([...full]).toEqual([1, 2, 3, 2.5, 4, 5, 0.2, 6]);
    // mu1 uniform on [0.2, 8] and below 2.5.
    expect(inference.logOrderProbability).toBeCloseTo(Math.log(2.3 / 7.8), 10);
    expect(inference.target.logPrior(Float64Array.of(2.6, 0, 0, 0, 0, 0))).toBe(-Infinity);
  });

  it('gives few mocks wider posteriors than the normal likelihood, by the matched inflation', () => {
    const base = madeUpSpec('background', { background: [1, 2] });
    const of = (likelihood: InferenceSpec['likelihood']): Record<string, { sd: number }> =>
      diagnoseAll(
        runReplicas(buildInference({ ...base, data: { ...base.data, mockCount: 40 }, likelihood }), 4000),
      );
    const [normal, matched] = [of('normal'), of('matched-t')];
    // The mean posterior covariance is that of S times [1 + B (p − n_p)], here at χ² about p.
    for (const name of ['c1', 'c2']) {
      expect(matched[name].sd).toBeGreaterThan(1.1 * normal[name].sd);
      expect(matched[name].sd).toBeLessThan(1.6 * normal[name].sd);
    }
  });

  it('finds a sharp posterior of high signal-to-noise', () => {
    const sharp = madeUpSpec('free-phase', { fields: 2, background: [1, 2] });
    const prediction = sharp.template.predict(Float64Array.of(1.7, 0.4, -0.3, 4.1, 0.2, 0.3, 0.5, -0.4));
    const covariance = sharp.data.covariance.map((value) => value * 4e-8);
    const inference = buildInference({ ...sharp, data: { S: prediction, covariance, mockCount: null } });
    const run = runReplicas(inference, 1500);
    const { mu1, mu2 } = diagnoseAll(run);
    expect(Math.min(...run.jumpAcceptance)).toBeGreaterThan(0.3);
    for (const [found, truth] of [
      [mu1, 1.7],
      [mu2, 4.1],
    ] as const) {
      expect(found.rhat).toBeLessThan(1.02);
      expect(found.sd).toBeLessThan(0.005);
      expect(Math.abs(found.mean - truth)).toBeLessThan(4 * found.sd);
    }
  });
});

describe('summaries', () => {
  it('take the best draw and the band of the predictions', () => {
    const spec = good();
    const inference = buildInference(spec);
    const rng = createRng('summary');
    const width = 2 + inference.sampled.length;
    const draws = new Float64Array(50 * width);
    for (let k = 0; k < 50; k += 1) {
      const x = draws.subarray(k * width + 2, (k + 1) * width);
      inference.target.drawPrior(rng, x);
      draws[k * width] = inference.target.logLikelihood(x);
    }
    const best = bestDraw(inference, draws, width);
    const all = Array.from({ length: 50 }, (_, k) => draws[k * width]);
    expect(best.logLikelihood).toBe(Math.max(...all));
    const band = posteriorBand(inference, spec.template, draws, { width, offset: 2 });
    const first = Array.from(
      { length: 50 },
      (_, k) => spec.template.predict(inference.expand(draws.slice(k * width + 2, (k + 1) * width)))[0],
    ).sort((a, b) => a - b);
    // Type 7 at 16 % of 50: position 7.84.
    expect(band.lo68[0]).toBeCloseTo(first[7] + 0.84 * (first[8] - first[7]), 12);
    expect(band.lo95[3]).toBeLessThan(band.lo68[3]);
    expect(band.hi68[3]).toBeLessThan(band.hi95[3]);
  });

  it('state resolution and Nyquist frequency of bins', () => {
    const facts = coverageFacts(binned);
    expect(facts.length).toBeCloseTo(Math.log(25), 12);
    expect(facts.resolution).toBeCloseTo((2 * Math.PI) / Math.log(25), 12);
    expect(facts.nyquist).toBeCloseTo((16 * Math.PI) / Math.log(25), 10);
  });
});
