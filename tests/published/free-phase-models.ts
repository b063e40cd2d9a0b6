import { buildInference, type Inference, type InferenceSpec } from '@/lib/inference';
import { compileTemplate, type Prior } from '@/lib/templates';
import type alias from './data/posteriors/alias.json';
import type nothing from './data/posteriors/null.json';
import type two from './data/posteriors/two-field.json';

/** The models of data/posteriors/README.md. */
export type Reference = typeof nothing | typeof two | typeof alias;

export function freePhaseSpec(reference: Reference, fields: number): InferenceSpec {
  const {
    prior_mu: mass,
    prior_osc: amplitude,
    prior_smooth: smooth,
    smooth_powers: background,
  } = reference.model;
  const axis = {
    kind: 'bins' as const,
    lo: Float64Array.from(reference.kappa_lo),
    hi: Float64Array.from(reference.kappa_hi),
    weightPower: 0,
  };
  const template =
    fields === 0
      ? compileTemplate('background', { background }, axis)
      : compileTemplate('free-phase', { fields, amplitudes: 'quadrature', background }, axis);
  const priorOf = (role: string): Prior => {
    if (role === 'mass') return { kind: 'uniform', lo: mass.lo, hi: mass.hi };
    const { mean, sd } = role === 'quadrature' ? amplitude : smooth;
    return { kind: 'normal', mean, sd };
  };
  return {
    data: {
      S: Float64Array.from(reference.S),
      covariance: Float64Array.from(reference.covariance.flat()),
      mockCount: null,
    },
    likelihood: 'normal',
    template,
    priors: Object.fromEntries(template.parameters.map(({ name, role }) => [name, priorOf(role)])),
  };
}

export function freePhaseModel(reference: Reference, fields: number): Inference {
  return buildInference(freePhaseSpec(reference, fields));
}
