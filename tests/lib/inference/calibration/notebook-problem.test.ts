import { describe, expect, it } from 'vitest';
import {
  calibrationProblem,
  rankDataset,
  summariseCalibration,
  verdictWords,
  type CalibrationSummary,
} from '@/lib/inference/calibration';
import { InferenceError, type InferenceSpec } from '@/lib/inference';
import { samplerOfNewFits, samplerSettings } from '@/lib/services/fit-sampler';
import { compileTemplate, type Axis, type Prior } from '@/lib/templates';

const bins = 16;
const edge = (i: number): number => 0.01 * 30 ** (i / bins);
const axis: Axis = {
  kind: 'bins',
  lo: Float64Array.from({ length: bins }, (_, i) => edge(i)),
  hi: Float64Array.from({ length: bins }, (_, i) => edge(i + 1)),
  weightPower: 0,
};
const diagonal = (variance: number): Float64Array =>
  Float64Array.from({ length: bins * bins }, (_, k) => (k % (bins + 1) === 0 ? variance : 0));

function specOf(
  id: string,
  options: Record<string, unknown>,
  likelihood: InferenceSpec['likelihood'] = 'normal',
  mockCount: number | null = null,
  given: Record<string, Prior> = {},
): InferenceSpec {
  const template = compileTemplate(id, options, axis);
  return {
    data: { S: new Float64Array(bins), covariance: diagonal(9e-4), mockCount },
    likelihood,
    template,
    priors: Object.fromEntries(
      template.parameters.map(({ name, defaultPrior }) => [name, given[name] ?? defaultPrior]),
    ),
  };
}

const settings = (blocks: readonly (readonly number[])[]) =>
  samplerSettings({ warmup: 200, sampler: samplerOfNewFits }, blocks);

function calibrated(N: number, spec: InferenceSpec, fitted?: InferenceSpec): CalibrationSummary {
  const problem = calibrationProblem(spec, settings, fitted);
  const found = Array.from({ length: N }, (_, k) => rankDataset(problem, 99, 'notebook', k));
  return summariseCalibration(found, 99);
}

const background = { background: [1, 2] };

describe('the calibration of a notebook’s posterior', () => {
  it.each([
    ['normal', null],
    ['hartlap', 40],
    ['sellentin-heavens', 40],
    ['matched-t', 40],
  ] as const)('holds under the %s likelihood with the noise that it is a density of', (kind, mocks) => {
    const summary = calibrated(60, specOf('background', background, kind, mocks));
    expect(verdictWords(summary)).toMatch(/^Calibrated within the band: the ranks of all 3 quantities/);
    expect(summary.unmixed).toEqual([]);
    expect(summary.coverage.every(({ held, lower, upper }) => held >= lower && held <= upper)).toBe(true);
  });

  it('finds out a normal likelihood for data whose covariance is of 30 mocks', () => {
    const summary = calibrated(
      60,
      specOf('background', background, 'sellentin-heavens', 30),
      specOf('background', background, 'normal', 30),
    );
    expect(summary.calibrated).toBe(false);
    expect(verdictWords(summary)).toContain('Not calibrated: 1 of 3 quantities leave their band');
    expect(verdictWords(summary)).toContain('The log-likelihood at the truth');
  });

  it('finds out a covariance of a quarter of the true one, as posteriors that are too narrow', () => {
    const sound = specOf('background', background);
    const summary = calibrated(60, sound, {
      ...sound,
      data: { ...sound.data, covariance: diagonal(9e-4 / 4) },
    });
    expect(verdictWords(summary)).toContain('Posterior too narrow in c1: U-shaped ranks');
    const wide = summary.coverage.find(({ name, level }) => name === 'c1' && level === 0.95)!;
    expect(wide.held).toBeLessThan(wide.lower);
  });

  it('uses no value of the measurement', () => {
    const spec = specOf('background', background);
    const other = { ...spec, data: { ...spec.data, S: new Float64Array(bins).fill(NaN) } };
    const ranks = (of: InferenceSpec) => rankDataset(calibrationProblem(of, settings), 19, 'same', 4);
    expect(ranks(other)).toEqual(ranks(spec));
  });

  // Truth, data and chain of each kind of template; what comes out is judged by the proofs of calibration.
  it.each([
    ['free-phase', { fields: 1 }, {}],
    ['free-phase', { fields: 1, amplitudes: 'amplitude-phase' }, { A1: { kind: 'fixed', value: 0.1 } }],
    ['free-phase', { fields: 1 }, { mu1: { kind: 'fixed', value: 2 } }],
    ['locked-squeezed', { fields: 1, vertex: 'mixture' }, {}],
    ['locked-squeezed', { fields: 2, phases: 'free' }, { theta: { kind: 'isotropic' } }],
    ['locked-exact', { fields: 1 }, {}],
    ['light', { fields: 1 }, {}],
  ] as const)('ranks every sampled parameter of %s %j with %j', (id, options, given) => {
    const spec = specOf(id, options, 'normal', null, given);
    const { ranks, covered, made } = rankDataset(calibrationProblem(spec, settings), 19, 'kinds', 0);
    const sampled = Object.entries(spec.priors).flatMap(([name, { kind }]) => (kind === 'fixed' ? [] : name));
    expect(Object.keys(covered)).toEqual(sampled);
    expect(Object.keys(ranks)).toEqual(['log likelihood', ...sampled]);
    expect(Object.values(ranks).every((rank) => rank >= 0 && rank <= 19)).toBe(true);
    expect(made).toBeGreaterThanOrEqual(57);
  });

  it('says what is wrong where every parameter is fixed', () => {
    const fixed = { c1: { kind: 'fixed', value: 1 }, c2: { kind: 'fixed', value: 0 } } as const;
    const spec = specOf('background', background, 'normal', null, fixed);
    expect(() => calibrationProblem(spec, settings)).toThrow(InferenceError);
  });
});

describe('the verdict in words', () => {
  const found = (count: number, rank: (k: number) => number, mixed: (k: number) => boolean = () => true) =>
    Array.from({ length: count }, (_, k) => ({
      ranks: { mu1: rank(k) },
      covered: { mu1: 4 },
      made: 400,
      ess: mixed(k) ? 200 : 20,
      reached: mixed(k),
    }));
  const words = (rank: (k: number) => number, mixed?: (k: number) => boolean) =>
    verdictWords(summariseCalibration(found(100, rank, mixed), 99), () => 'μ1');

  it.each([
    ['Posterior too narrow in μ1: U-shaped ranks', (k: number) => (k % 2 ? k % 10 : 99 - (k % 10))],
    ['Posterior too wide in μ1: ranks heap up in the middle', (k: number) => 40 + (k % 20)],
    ['Posterior too low in μ1: the truths rank high', (k: number) => 70 + (k % 30)],
    ['Posterior too high in μ1: the truths rank low', (k: number) => k % 30],
  ])('says “%s”', (said, rank) => {
    expect(words(rank)).toContain(said);
  });

  it('is calm where all is well, and names chains that didn’t mix without dropping their ranks', () => {
    expect(words((k) => k)).toBe(
      'Calibrated within the band: the ranks of all 1 quantities keep within it, over 100 simulated data sets.',
    );
    const summary = summariseCalibration(
      found(
        100,
        (k) => k,
        (k) => k !== 7,
      ),
      99,
    );
    expect(summary.unmixed).toEqual([7]);
    expect(summary.leastEss).toBe(20);
    expect(summary.quantities[0].bars.reduce((sum, bar) => sum + bar, 0)).toBe(100);
    expect(verdictWords(summary)).toContain(
      '1 of 100 chains did not mix (data set 7): its ranks are counted',
    );
    expect(
      words(
        (k) => k,
        (k) => k > 20,
      ),
    ).toMatch(/21 of 100 chains did not mix \(data sets 0, 1, .* and 13 more\)/);
  });
});
