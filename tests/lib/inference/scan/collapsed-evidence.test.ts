import { describe, expect, it } from 'vitest';
import { assemble, buildInference, type InferenceSpec } from '@/lib/inference';
import { buildCollapsedModel } from '@/lib/inference/scan';
import { compileTemplate, type Prior } from '@/lib/templates';
import { bruteForce, posterior } from '../brute-force';
import { binned, madeUpData, madeUpSpec } from '../fixtures';

const normal = (sd: number, mean = 0): Prior => ({ kind: 'normal', mean, sd });

describe('the log evidence at fixed frequencies is that of brute-force quadrature', () => {
  it.each(['normal', 'hartlap', 'sellentin-heavens'] as const)(
    'one free field, %s, to 1e-10',
    (likelihood) => {
      const spec = {
        ...madeUpSpec(
          'free-phase',
          { fields: 1, background: [1] },
          { a1: normal(0.3), b1: normal(0.3, 0.1), c1: normal(0.5) },
        ),
        data: madeUpData(0.05, likelihood === 'normal' ? null : 30),
        likelihood,
      };
      const exact = buildCollapsedModel(spec).logEvidence([2.1], 1);
      const brute = bruteForce(posterior(spec, [2.1]).f, [
        { lo: -2.4, hi: 2.4, n: 110 },
        { lo: -2.4, hi: 2.6, n: 110 },
        { lo: -4, hi: 4, n: 130 },
      ]);
      expect(Math.abs((exact ?? NaN) - brute)).toBeLessThan(1e-10);
    },
  );

  it('the matched exponent, which only the fit’s own likelihood has, to 1e-10', () => {
    const spec = {
      ...madeUpSpec(
        'locked-squeezed',
        { fields: 1, vertex: 1, background: [1] },
        { g: normal(8), c1: normal(0.5) },
      ),
      data: madeUpData(0.05, 40),
      likelihood: 'matched-t' as const,
    };
    const exact = buildCollapsedModel(spec, (kind) => kind).logEvidence([1.4], 1);
    const fixedMass = { ...spec, priors: { ...spec.priors, mu1: { kind: 'fixed' as const, value: 1.4 } } };
    const { target } = buildInference(fixedMass);
    // Fixing the mass takes a parameter from the matched exponent: put it in place by hand.
    const whole = buildInference(spec).target;
    const brute = bruteForce(
      (x) => target.logPrior(x) + whole.logLikelihood(Float64Array.of(1.4, x[0], x[1])),
      [
        { lo: -64, hi: 64, n: 500 },
        { lo: -4, hi: 4, n: 500 },
      ],
    );
    expect(whole.names).toEqual(['mu1', 'g', 'c1']);
    expect(Math.abs((exact ?? NaN) - brute)).toBeLessThan(1e-10);
  });

  it('two locked fields, t likelihood: angle by quadrature, coupling exactly, to 1e-9', () => {
    const spec = {
      ...madeUpSpec('locked-squeezed', { fields: 2, vertex: 2, background: [] }, { g: normal(3) }),
      data: madeUpData(0.05, 40),
      likelihood: 'sellentin-heavens' as const,
    };
    const exact = buildCollapsedModel(spec).logEvidence([0.9, 2.2], 6);
    const { f, names } = posterior(spec, [0.9, 2.2]);
    expect(names).toEqual(['theta', 'g']);
    // Weights are even in the angle: mirrored, the integrand is periodic, and the trapezoidal rule converges geometrically.
    const brute = bruteForce(
      (x) => f(Float64Array.of(Math.abs(x[0]), x[1])),
      [
        { lo: -Math.PI / 2, hi: Math.PI / 2, n: 400 },
        { lo: -24, hi: 24, n: 600 },
      ],
    );
    expect(Math.abs((exact ?? NaN) - (brute - Math.LN2))).toBeLessThan(1e-9);
  });

  it('amplitude and phase, uniform both: an edge at A = 0 and a bound, to 1e-7', () => {
    const spec = madeUpSpec(
      'free-phase',
      { fields: 1, amplitudes: 'amplitude-phase', background: [] },
      {
        A1: { kind: 'uniform', lo: 0, hi: 0.25 },
      },
    );
    const exact = buildCollapsedModel(spec).logEvidence([2.1], 2);
    const { f } = posterior(spec, [2.1]);
    // Midpoints converge as h² at an edge: Richardson's step takes the leading error away.
    const at = (n: number): number =>
      bruteForce(f, [
        { lo: 0, hi: 0.25, n },
        { lo: -Math.PI, hi: Math.PI, n: 200 },
      ]);
    const [coarse, fine] = [Math.exp(at(1000)), Math.exp(at(2000))];
    expect(Math.abs((exact ?? NaN) - Math.log((4 * fine - coarse) / 3))).toBeLessThan(1e-7);
  });

  it('uniform and log-uniform priors whose bounds bind: within 1 %', () => {
    const spec = madeUpSpec(
      'free-phase',
      { fields: 1, background: [1, 2] },
      {
        a1: { kind: 'uniform', lo: -0.05, hi: 0.06 },
        b1: { kind: 'half-normal', sd: 0.2 },
        c1: { kind: 'truncated-normal', mean: 0, sd: 0.3, lo: 0, hi: 0.2 },
        c2: { kind: 'log-uniform', lo: 0.01, hi: 1 },
      },
    );
    const exact = buildCollapsedModel(spec).logEvidence([2.1], 1);
    const { f } = posterior(spec, [2.1]);
    const brute = bruteForce(f, [
      { lo: -0.05, hi: 0.06, n: 30 },
      { lo: 0, hi: 1, n: 40 },
      { lo: 0, hi: 0.2, n: 30 },
      { lo: 0.01, hi: 1, n: 60 },
    ]);
    expect(Math.abs((exact ?? NaN) - brute)).toBeLessThan(0.01);
  });

  it('two measurements jointly, one of them with mocks: shared amplitudes, own backgrounds, to 1e-9', () => {
    const options = { fields: 1, background: [] };
    const priors = { a1: normal(0.3), b1: normal(0.3) };
    const first = madeUpSpec('free-phase', options, priors);
    const secondAxis = {
      kind: 'points' as const,
      kappa: Float64Array.from({ length: 16 }, (_, i) => 0.02 * 1.15 ** i),
    };
    const second: InferenceSpec = {
      ...first,
      data: madeUpData(0.08, 35),
      likelihood: 'sellentin-heavens',
      template: compileTemplate('free-phase', { ...options, background: [1] }, secondAxis),
      priors: { ...first.priors, c1: normal(0.5) },
    };
    const joint = assemble({
      parts: [
        { label: 'first', axis: binned, data: first.data },
        { label: 'second', axis: secondAxis, data: second.data },
      ],
      template: { id: 'free-phase', options: { ...options, background: [1] } },
      likelihood: 'sellentin-heavens',
      // The first measurement's slope is held at nothing.
      priors: { ...first.priors, c1_1: { kind: 'fixed', value: 0 }, c1_2: normal(0.5) },
    });
    const exact = buildCollapsedModel(joint).logEvidence([2.1], 1);
    const one = posterior(first, [2.1]);
    const two = posterior(second, [2.1]);
    const amplitudes = (x: Float64Array): number =>
      [0, 1].reduce((sum, i) => sum - 0.5 * (x[i] / 0.3) ** 2 - Math.log(0.3 * Math.sqrt(2 * Math.PI)), 0);
    // Both posteriors hold the prior of the shared amplitudes: once is enough.
    const brute = bruteForce(
      (x) => one.f(x.subarray(0, 2)) + two.f(x) - amplitudes(x),
      [
        { lo: -2.4, hi: 2.4, n: 110 },
        { lo: -2.4, hi: 2.4, n: 110 },
        { lo: -4, hi: 4, n: 120 },
      ],
    );
    expect(Math.abs((exact ?? NaN) - brute)).toBeLessThan(1e-9);
  });
});

describe('the best fit with flat linear terms', () => {
  it('of several measurements is a stationary point of the joint likelihood', () => {
    const options = { fields: 1, background: [1] };
    const first = madeUpSpec('free-phase', options);
    const second = { ...first, data: madeUpData(0.08, 35), likelihood: 'sellentin-heavens' as const };
    const joined = assemble({
      parts: [
        { label: 'first', axis: binned, data: first.data },
        { label: 'second', axis: binned, data: second.data },
      ],
      template: { id: 'free-phase', options },
      likelihood: 'sellentin-heavens',
      priors: { ...first.priors, c1_1: first.priors.c1, c1_2: first.priors.c1 },
    });
    const model = buildCollapsedModel(joined);
    const { coefficients, logLikelihood } = model.fit([2.1]);
    const [one, two] = [posterior(first, [2.1]), posterior(second, [2.1])];
    const priorOf = (spec: InferenceSpec, x: Float64Array): number => {
      const fixed = { ...spec.priors, mu1: { kind: 'fixed' as const, value: 2.1 } };
      return buildInference({ ...spec, priors: fixed }).target.logPrior(x);
    };
    // Coefficients: a, b, then each block's own background.
    const joint = (c: ArrayLike<number>): number => {
      const [x, y] = [Float64Array.of(c[0], c[1], c[2]), Float64Array.of(c[0], c[1], c[3])];
      return one.f(x) - priorOf(first, x) + two.f(y) - priorOf(second, y);
    };
    expect(joint(coefficients)).toBeCloseTo(logLikelihood, 9);
    for (let i = 0; i < 4; i += 1) {
      for (const step of [-1e-4, 1e-4]) {
        const moved = Float64Array.from(coefficients);
        moved[i] += step;
        expect(joint(moved)).toBeLessThan(logLikelihood);
      }
    }
  });
});
