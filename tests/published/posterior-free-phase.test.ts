import { describe, expect, it } from 'vitest';
import { buildInference, type Inference } from '@/lib/inference';
import { layOutParameters } from '@/lib/inference/parameter-layout';
import { LinearModel } from '@/lib/inference/collapsed';
import { whitenBackground } from '@/lib/inference/target';
import { buildWhitening } from '@/lib/inference/whitening';
import { mcseQuantile } from '@/lib/sampler/diagnostics';
import { compileTemplate, type CompiledTemplate, type Prior } from '@/lib/templates';
import { diagnoseAll, runReplicas, worstSize } from '../lib/inference/sampling';
import alias from './data/posteriors/alias.json';
import nothing from './data/posteriors/null.json';
import two from './data/posteriors/two-field.json';

/** Exact posteriors derived by us (see data/posteriors/README.md). */
type Reference = typeof nothing | typeof two | typeof alias;

function axisOf(reference: Reference) {
  return {
    kind: 'bins' as const,
    lo: Float64Array.from(reference.kappa_lo),
    hi: Float64Array.from(reference.kappa_hi),
    weightPower: 0,
  };
}

function dataOf(reference: Reference) {
  return {
    S: Float64Array.from(reference.S),
    covariance: Float64Array.from(reference.covariance.flat()),
    mockCount: null,
  };
}

const normal = ({ mean, sd }: { mean: number; sd: number }): Prior => ({ kind: 'normal', mean, sd });

function priorsOf(reference: Reference, template: CompiledTemplate): Record<string, Prior> {
  const { prior_mu: mass, prior_osc: amplitude, prior_smooth: smooth } = reference.model;
  return Object.fromEntries(
    template.parameters.map(({ name, role }) => [
      name,
      role === 'mass'
        ? { kind: 'uniform', lo: mass.lo, hi: mass.hi }
        : normal(role === 'quadrature' ? amplitude : smooth),
    ]),
  );
}

function model(reference: Reference, fields: number): { template: CompiledTemplate; inference: Inference } {
  const background = reference.model.smooth_powers;
  const axis = axisOf(reference);
  const template =
    fields === 0
      ? compileTemplate('background', { background }, axis)
      : compileTemplate('free-phase', { fields, amplitudes: 'quadrature', background }, axis);
  const priors = priorsOf(reference, template);
  return {
    template,
    inference: buildInference({ data: dataOf(reference), likelihood: 'normal', template, priors }),
  };
}

describe('exact posteriors of free-phase models', () => {
  it.each([
    ['null', nothing],
    ['two-field', two],
    ['alias', alias],
  ] as const)('%s: the log evidence of the background alone is exact', (_, reference) => {
    const { template } = model(reference, 0);
    const layout = layOutParameters({ template, priors: priorsOf(reference, template) });
    const whitening = buildWhitening(dataOf(reference));
    const linear = new LinearModel(layout, whitening, [], whitenBackground(layout, whitening), 1);
    expect(linear.logEvidence(0, 0)).toBeCloseTo(reference.exact.none.logZ, 8);
  });

  const cases = [
    {
      what: 'null, background',
      reference: nothing,
      fields: 0,
      exact: nothing.exact.none,
      draws: 4000,
      accepted: 0.95,
    },
    {
      what: 'null, one field',
      reference: nothing,
      fields: 1,
      exact: nothing.exact.one,
      draws: 5000,
      accepted: 0.8,
    },
    {
      what: 'two-field, one field',
      reference: two,
      fields: 1,
      exact: two.exact.one,
      draws: 4000,
      accepted: 0.8,
    },
    {
      what: 'two-field, two fields',
      reference: two,
      fields: 2,
      exact: two.exact.two,
      draws: 5000,
      accepted: 0.7,
    },
    {
      what: 'alias, one field',
      reference: alias,
      fields: 1,
      exact: alias.exact.one,
      draws: 5000,
      accepted: 0.8,
    },
  ];
  it.each(cases)(
    '$what: means, sds and quantiles of four replicas are within 4 MCSE at 10,000 effective draws',
    ({ reference, fields, exact, draws, accepted }) => {
      const run = runReplicas(model(reference, fields).inference, draws);
      const diagnoses = diagnoseAll(run);
      expect(worstSize(diagnoses)).toBeGreaterThanOrEqual(10_000);
      expect(Math.min(...run.jumpAcceptance)).toBeGreaterThan(accepted);
      for (const [name, mean] of Object.entries(exact.mean)) {
        const found = diagnoses[name];
        expect(found.rhat, `R-hat of ${name}`).toBeLessThan(1.01);
        expect(Math.abs(found.mean - mean) / found.mcseMean, `mean of ${name}`).toBeLessThan(4);
        const sd = (exact.sd as Record<string, number>)[name];
        expect(Math.abs(found.sd - sd) / found.mcseSd, `sd of ${name}`).toBeLessThan(4);
      }
      if (!('mu1_quantiles' in exact)) return;
      const pooled = Float64Array.from(run.chains.mu1.flatMap((chain) => [...chain])).sort();
      for (const [level, value] of Object.entries(exact.mu1_quantiles)) {
        const at = Number(level) * (pooled.length - 1);
        const below = Math.floor(at);
        const found =
          pooled[below] + (at - below) * (pooled[Math.min(pooled.length - 1, below + 1)] - pooled[below]);
        const error = mcseQuantile(run.chains.mu1, Number(level));
        expect(Math.abs(found - value) / error, `quantile ${level} of mu1`).toBeLessThan(4);
      }
    },
  );

  it('alias: the weight of every mode is within 4 MCSE', () => {
    const run = runReplicas(model(alias, 1).inference, 5000, { seed: 'modes' });
    for (const { mu_lo: lo, mu_hi: hi, weight } of alias.exact.one.modes) {
      const inside = run.chains.mu1.map((chain) => chain.map((mu) => (mu > lo && mu <= hi ? 1 : 0)));
      const all = Float64Array.from(inside.flatMap((chain) => [...chain]));
      const found = all.reduce((sum, value) => sum + value, 0) / all.length;
      // Batch means; a mode of small weight may not be visited, so at least the error that independent draws would have.
      const batches = inside.flatMap((chain) =>
        Array.from({ length: 10 }, (_, b) => {
          const part = chain.subarray((b * chain.length) / 10, ((b + 1) * chain.length) / 10);
          return part.reduce((sum, value) => sum + value, 0) / part.length;
        }),
      );
      const spread = batches.reduce((sum, value) => sum + (value - found) ** 2, 0) / (batches.length - 1);
      const error = Math.max(
        Math.sqrt(spread / batches.length),
        Math.sqrt((weight * (1 - weight)) / all.length),
      );
      expect(Math.abs(found - weight) / error, `mode ${lo} to ${hi}`).toBeLessThan(4);
    }
  });
});
