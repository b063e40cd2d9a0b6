import { describe, expect, it } from 'vitest';
import { buildInference, exactLogEvidence, type Inference, type InferenceSpec } from '@/lib/inference';
import { buildCollapsedModel } from '@/lib/inference/scan';
import { gaussLegendre, logSumExp } from '@/lib/inference/scan/quadrature-nodes';
import { advance, betaQuantile, evidenceOf, startReplica, stonesOf } from '@/lib/sampler';
import { samplerOfNewFits, samplerSettings } from '@/lib/services/fit-sampler';
import { compileTemplate } from '@/lib/templates';
import { measurement } from '../lib/inference/measured';
import { freePhaseModel, freePhaseSpec } from '../published/free-phase-models';
import alias from '../published/data/posteriors/alias.json';
import nothing from '../published/data/posteriors/null.json';
import two from '../published/data/posteriors/two-field.json';
import { proof } from './proof';

/** ln evidence as a fit finds it: four replicas with the settings of new fits. */
function sampled({ target, jumps, blocks }: Inference, seed: string, kept: number) {
  const settings = samplerSettings({ warmup: 400, sampler: samplerOfNewFits }, blocks);
  const states = [0, 1, 2, 3].map((replica) => {
    const start = startReplica(target, jumps, settings, seed, replica);
    return advance(target, jumps, settings, start, settings.warmup + kept).state;
  });
  const evidence = evidenceOf(states.flatMap((state) => stonesOf(state) ?? []));
  if (!('value' in evidence)) throw new Error(evidence.because);
  return { ...evidence, rests: states.every((state) => state.stones !== undefined) };
}

function tQuantile(above: number, dof: number): number {
  const x = betaQuantile(2 * above, dof / 2, 0.5);
  return Math.sqrt(dof * (1 / x - 1));
}

/** Evidences derived by us: tests/published/data/posteriors/README.md. */
const references = [
  { name: 'null, one field', reference: nothing, fields: 1, exact: nothing.exact.one.logZ },
  { name: 'two fields, as one', reference: two, fields: 1, exact: two.exact.one.logZ },
  { name: 'two fields', reference: two, fields: 2, exact: two.exact.two.logZ },
  { name: 'alias, one field', reference: alias, fields: 1, exact: alias.exact.one.logZ },
] as const;

/** One field measured with mocks, amplitudes and background with normal priors so that they can be integrated. */
function measuredSpec(likelihood: InferenceSpec['likelihood']): InferenceSpec {
  const { axis, data } = measurement('two-field', 0.2);
  const template = compileTemplate('free-phase', { fields: 1, background: [1, 2] }, axis);
  const priors = Object.fromEntries(
    template.parameters.map(({ name, role }) => [
      name,
      role === 'mass'
        ? ({ kind: 'uniform', lo: 0.3, hi: 8 } as const)
        : ({ kind: 'normal', mean: 0, sd: 5 } as const),
    ]),
  );
  return { data, likelihood, template, priors };
}

describe('evidences as fits find them', () => {
  proof(
    {
      name: 'evidence-fits',
      claim:
        'on four posteriors with exact evidences every fit is within t(0.99995) of its error, and the scatter over the fits is the error quoted',
      unit: 'fits of four replicas a posterior',
      gate: 4,
      full: 40,
      seed: 20262,
    },
    ({ size, full, seed, record }) => {
      const rows = references.map(({ name, reference, fields, exact }) => {
        const inference = freePhaseModel(reference, fields);
        const found = Array.from({ length: size }, (_, k) =>
          sampled(inference, `${seed}/${name}/${k}`, 1200),
        );
        const scatter = Math.sqrt(found.reduce((sum, { value }) => sum + (value - exact) ** 2, 0) / size);
        const quoted = Math.sqrt(found.reduce((sum, { error }) => sum + error ** 2, 0) / size);
        const worst = Math.max(
          ...found.map(({ value, error, dof }) => Math.abs(value - exact) / error / tQuantile(5e-5, dof)),
        );
        const rests = found.filter((each) => each.rests).length / size;
        const row = {
          name,
          exact,
          quoted,
          scatterOverQuoted: scatter / quoted,
          worstOverBound: worst,
          rests,
        };
        record({ [name]: row });
        return row;
      });
      const square = rows.reduce((sum, row) => sum + row.scatterOverQuoted ** 2, 0) / rows.length;
      const wider = Math.max(1, Math.sqrt(full / (size * rows.length)));
      expect(Math.sqrt(square)).toBeGreaterThan(0.65 ** wider);
      expect(Math.sqrt(square)).toBeLessThan(1.5 ** wider);
      for (const row of rows) {
        expect(row.worstOverBound, row.name).toBeLessThan(1);
        expect(row.quoted, row.name).toBeLessThan(0.02);
        if (size < full) continue;
        expect(row.scatterOverQuoted, row.name).toBeGreaterThan(0.65);
        expect(row.scatterOverQuoted, row.name).toBeLessThan(1.5);
      }
    },
  );

  it.each([nothing, two, alias])('are exact for a background alone', (reference) => {
    expect(exactLogEvidence(freePhaseSpec(reference, 0))).toBeCloseTo(reference.exact.none.logZ, 9);
    expect(exactLogEvidence(freePhaseSpec(reference, 1))).toBeNull();
  });

  it('take the Sellentin–Heavens exponent where the matched one is sampled: as quadrature over the frequency does', () => {
    const exact = overFrequency(measuredSpec('sellentin-heavens'), 0.3, 8);
    const inference = buildInference(measuredSpec('matched-t'));
    expect(inference.target.evidence?.exponent).toBeGreaterThan(1.01);
    for (const likelihood of ['matched-t', 'sellentin-heavens'] as const) {
      const { value, error, dof } = sampled(buildInference(measuredSpec(likelihood)), likelihood, 3000);
      expect(error).toBeLessThan(0.02);
      expect(Math.abs(value - exact) / error).toBeLessThan(tQuantile(5e-5, dof));
    }
    // The matched exponent itself would be another number.
    const own = { ...inference, target: { ...inference.target, evidence: undefined } };
    const other = sampled(own, 'own', 3000);
    expect(Math.abs(other.value - exact)).toBeGreaterThan(10 * other.error);
  });

  it.each([2, 'mixture'])('agree with quadrature for locked phases too, vertex %s', (vertex) => {
    const { axis, data } = measurement('two-field', 0.2);
    const template = compileTemplate('locked-squeezed', { fields: 1, vertex, background: [1, 2] }, axis);
    const priors = Object.fromEntries(template.parameters.map((p) => [p.name, p.defaultPrior]));
    const spec = { data, likelihood: 'matched-t', template, priors } as const;
    const mass = priors[template.parameters.find(({ role }) => role === 'mass')?.name ?? ''];
    if (mass.kind !== 'uniform') throw new Error('another prior of the mass');
    const exact = overFrequency(spec, mass.lo, mass.hi);
    const { value, error, dof, rests } = sampled(buildInference(spec), 'locked', 3000);
    expect(rests).toBe(true);
    expect(error).toBeLessThan(0.05);
    // Bounds of priors that bind are known to 1 % in the quadrature.
    expect(Math.abs(value - exact)).toBeLessThan(Math.hypot(tQuantile(5e-5, dof) * error, 0.02));
  });
});

/** ln evidence by quadrature over one frequency with a uniform prior, everything else integrated at each. */
function overFrequency(spec: InferenceSpec, lo: number, hi: number): number {
  const model = buildCollapsedModel(spec);
  const width = hi - lo;
  const panels = 400;
  const step = width / panels;
  const terms = Array.from({ length: panels }, (_, k) => {
    const { at, weight } = gaussLegendre(lo + step * k, lo + step * (k + 1), 8);
    return Array.from(at, (mu, i) => Math.log(weight[i] / width) + (model.logEvidence([mu], 6) ?? NaN));
  });
  return logSumExp(terms.flat());
}
