import { describe, expect, it } from 'vitest';
import { exactLogEvidence } from '@/lib/inference';
import { buildCollapsedModel } from '@/lib/inference/scan';
import { gaussLegendre, logSumExp } from '@/lib/inference/scan/quadrature-nodes';
import {
  amplitudePriors,
  exactWidths,
  reweightedWidths,
  WIDTH_FACTORS,
} from '@/lib/inference/width-evidence';
import type { InferenceSpec } from '@/lib/inference';
import { createRng } from '@/lib/sampler';
import { compileTemplate, type Prior } from '@/lib/templates';
import nothing from '../../published/data/posteriors/null.json';
import two from '../../published/data/posteriors/two-field.json';

/** Exact evidences derived by us: tests/published/data/posteriors/README.md. */
function specOf(
  reference: typeof nothing | typeof two,
  width = 0.6,
  mocks: number | null = null,
): InferenceSpec {
  const axis = {
    kind: 'bins' as const,
    lo: Float64Array.from(reference.kappa_lo),
    hi: Float64Array.from(reference.kappa_hi),
    weightPower: 0,
  };
  const template = compileTemplate('free-phase', { fields: 1, background: [1, 2] }, axis);
  const priors = Object.fromEntries(
    template.parameters.map(({ name, role }): [string, Prior] => [
      name,
      role === 'mass'
        ? { kind: 'uniform', lo: 0.2, hi: 8 }
        : { kind: 'normal', mean: 0, sd: role === 'quadrature' ? width : 1 },
    ]),
  );
  return {
    data: {
      S: Float64Array.from(reference.S),
      covariance: Float64Array.from(reference.covariance.flat()),
      mockCount: mocks,
    },
    likelihood: mocks === null ? 'normal' : 'matched-t',
    template,
    priors,
  };
}

/** ln Z of one field by a plain sum over a fine grid of masses, apart from the code under test. */
function logZ(spec: InferenceSpec): number {
  const model = buildCollapsedModel(spec);
  const { at, weight } = gaussLegendre(0.2, 8, 400);
  return logSumExp(
    Array.from(at, (mu, i) => Math.log(weight[i] / 7.8) + (model.logEvidence([mu], 1) ?? NaN)),
  );
}

describe('the evidence of one field against the width of the amplitudes’ prior', () => {
  it.each([
    ['null', nothing],
    ['two-field', two],
  ] as const)('%s: every width gives the evidence of a notebook with that prior', (_, reference) => {
    const spec = specOf(reference);
    expect(logZ(spec)).toBeCloseTo(reference.exact.one.logZ, 6);
    const amplitudes = amplitudePriors(spec);
    if (!amplitudes) throw new Error('no amplitudes');
    const points = exactWidths(spec, amplitudes) ?? [];
    expect(points.map(({ factor }) => factor)).toEqual(WIDTH_FACTORS);
    for (const { factor, difference } of points) {
      expect(difference, String(factor)).toBeCloseTo(
        logZ(specOf(reference, 0.6 * factor)) - reference.exact.one.logZ,
        5,
      );
    }
  });

  it('goes to the evidence of the background alone as the prior narrows, for covariances from mocks too', () => {
    for (const mocks of [null, 400]) {
      const spec = specOf(two, 1e-5, mocks);
      const amplitudes = amplitudePriors(spec);
      const points = (amplitudes && exactWidths(spec, amplitudes, [0.1, 1])) ?? [];
      const bare = compileTemplate(
        'background',
        { background: [1, 2] },
        {
          kind: 'bins',
          lo: Float64Array.from(two.kappa_lo),
          hi: Float64Array.from(two.kappa_hi),
          weightPower: 0,
        },
      );
      const background = exactLogEvidence({ ...spec, template: bare }) ?? NaN;
      expect(logZ(spec) + (points[0].difference ?? NaN)).toBeCloseTo(background, 5);
    }
  });

  it('has no exact curve for two fields or locked phases', () => {
    const spec = specOf(two);
    const axis = { kind: 'points' as const, kappa: Float64Array.from(two.kappa_lo) };
    for (const [id, options] of [
      ['free-phase', { fields: 2 }],
      ['locked-squeezed', { fields: 1 }],
    ] as const) {
      const template = compileTemplate(id, options, axis);
      const priors = Object.fromEntries(
        template.parameters.map(({ name, defaultPrior }) => [name, defaultPrior]),
      );
      const other = { ...spec, template, priors };
      const amplitudes = amplitudePriors(other);
      expect(amplitudes?.parameters).toEqual(id === 'free-phase' ? ['a1', 'b1', 'a2', 'b2'] : ['g']);
      expect(amplitudes && exactWidths(other, amplitudes)).toBeNull();
    }
    const uniform = { ...spec.priors, a1: { kind: 'uniform', lo: -1, hi: 1 } as const };
    expect(amplitudePriors({ template: spec.template, priors: uniform })).toBeNull();
  });
});

/**
 * One datum d = c + noise of unit variance, c ~ N(0, s): ln Z(s) = ln N(d; 0, 1 + s²), and the posterior of c is normal with precision
 * 1 + 1/s². Independent draws, so that nothing but the weighting is tested.
 */
describe('reweighting draws', () => {
  const exact = (d: number, s: number) => -0.5 * (Math.log(1 + s * s) + (d * d) / (1 + s * s));
  function draws(d: number, s: number, noise = 1) {
    const rng = createRng(`widths ${d} ${s} ${noise}`);
    const precision = 1 / noise ** 2 + 1 / s ** 2;
    const chains = Array.from({ length: 4 }, () =>
      Float64Array.from(
        { length: 5000 },
        () => d / noise ** 2 / precision + rng.normal() / Math.sqrt(precision),
      ),
    );
    const logLikelihood = chains.map((chain) => chain.map((c) => -0.5 * ((d - c) / noise) ** 2));
    return { parameters: [chains], logLikelihood };
  }

  it('gives the known evidence at every width, within its error', () => {
    const found = reweightedWidths({ parameters: ['g'], sds: [3] }, { ...draws(2, 3), exponent: 1 });
    const valued = found.filter(({ difference }) => difference !== null);
    expect(valued.length).toBeGreaterThan(8);
    for (const { factor, difference, error } of valued) {
      // Normal quantile at a family-wise 1 % of thirteen widths.
      const bound = 3.4 * (error ?? NaN) + 1e-12;
      expect(
        Math.abs((difference ?? NaN) - (exact(2, 3 * factor) - exact(2, 3))),
        String(factor),
      ).toBeLessThan(bound);
      if (factor !== 1) expect(error, String(factor)).toBeLessThan(0.2);
    }
  });

  it('takes the power of the likelihood that evidences are of into account', () => {
    // L² of unit noise is a normal likelihood of half the variance, up to a constant.
    const tight = (s: number) => -0.5 * (Math.log(0.5 + s * s) + 4 / (0.5 + s * s));
    const found = reweightedWidths(
      { parameters: ['g'], sds: [3] },
      { ...draws(2, 3), exponent: 2 },
      [0.5, 2],
    );
    for (const { factor, difference, error } of found) {
      const off = Math.abs((difference ?? NaN) - (tight(3 * factor) - tight(3)));
      expect(off, String(factor)).toBeLessThan(3.4 * (error ?? NaN));
    }
  });

  it('has no value, with the reason, where the weights degenerate', () => {
    // The data say nothing: the draws are of the prior, and for twice its width the weights have no variance.
    const loose = reweightedWidths(
      { parameters: ['g'], sds: [1] },
      { ...draws(0, 1, 100), exponent: 1 },
      [4, 8],
    );
    expect(loose.map(({ difference }) => difference)).toEqual([null, null]);
    expect(loose.map(({ because }) => because)).toEqual(
      loose.map(() => expect.stringMatching(/weight|reach/) as unknown),
    );
    // The data settle it far from zero: a narrow prior's posterior is where no draw is.
    const far = reweightedWidths({ parameters: ['g'], sds: [10] }, { ...draws(20, 10), exponent: 1 }, [0.05]);
    expect(far[0].because).toMatch(/hardly reach/);
  });
});
