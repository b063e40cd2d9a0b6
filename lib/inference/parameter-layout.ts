import type { CompiledTemplate, ParameterDeclaration, ParameterRole, Prior } from '@/lib/templates';
import { InferenceError } from './inference-error';
import { isScalarPrior, priorSupport, validatePrior, type ScalarPrior } from './priors';
import { MassOrder } from './mass-order';
import type { MassPrior } from './ordered-masses';
import type { InferenceSpec } from './types';

/** Which parameter is what, and which are sampled. Indices are into the template's parameters unless said. */
export interface ParameterLayout {
  readonly template: CompiledTemplate;
  /** Prior of every parameter. */
  readonly priors: readonly Prior[];
  /** Parameters that are sampled (not fixed), in order: `free[position] = index`. */
  readonly free: readonly number[];
  /** Position among the sampled parameters, or −1 for a fixed one. */
  readonly position: readonly number[];
  /** Full vector with the fixed values in place, zeros elsewhere. */
  readonly base: Float64Array;
  /** Mass parameter of every field. */
  readonly masses: readonly number[];
  readonly massPriors: readonly MassPrior[];
  readonly massOrder: MassOrder;
  /** ln P(masses come in order). */
  readonly logOrderProbability: number;
  readonly angles: readonly number[];
  /** True if the angles have the isotropic prior together. */
  readonly isotropic: boolean;
  /** Coupling g, or −1. */
  readonly coupling: number;
  /** Vertex angle α of a mixture, or −1. */
  readonly vertexAngle: number;
  /** Amplitude and phase of every field, or −1. */
  readonly amplitudes: readonly number[];
  readonly phases: readonly number[];
  /** Cosine and sine amplitude of every field; empty where there are none. */
  readonly quadratures: readonly (readonly [number, number])[];
  /** Coefficients of the fixed columns, in their order. */
  readonly background: readonly number[];
}

/**
 * Settles the layout and checks every prior against its parameter. Throws the first InferenceError: a prior missing or
 * invalid, `isotropic` on some angles only, masses that can't be in order, nothing to sample.
 */
export function layOutParameters(spec: Pick<InferenceSpec, 'template' | 'priors'>): ParameterLayout {
  const { template } = spec;
  const { parameters } = template;
  const priors = parameters.map((declaration) => {
    const prior = spec.priors[declaration.name];
    if (prior === undefined) {
      throw new InferenceError(
        'prior_missing',
        `priors.${declaration.name}`,
        `${declaration.name} has no prior`,
        'give one, or fix the parameter to a value',
      );
    }
    const fault = validatePrior(prior, declaration);
    if (fault) throw fault;
    return prior;
  });
  const withRole = (role: ParameterRole): number[] =>
    parameters.flatMap((declaration, index) => (declaration.role === role ? [index] : []));
  const perField = (role: ParameterRole): number[] =>
    template.blocks.map((_, field) => parameters.findIndex((d) => d.role === role && d.field === field));

  const angles = withRole('angle');
  const isotropic = angles.length > 0 && angles.every((index) => priors[index].kind === 'isotropic');
  const partly = angles.find((index) => priors[index].kind === 'isotropic');
  if (!isotropic && partly !== undefined) {
    throw new InferenceError(
      'prior_not_allowed',
      `priors.${parameters[partly].name}.kind`,
      'the isotropic prior is one density of all mixing angles together, and some angle has another prior',
      'make all of them isotropic, or none',
    );
  }

  const masses = template.blocks.map((block) => block.mass);
  const massPriors = masses.map((index) => priors[index] as MassPrior);
  const massOrder = new MassOrder(
    template.blocks.map(({ kind }) => kind),
    massPriors,
  );
  const logOrder = massOrder.logProbability;
  if (logOrder === -Infinity) {
    const names = masses.map((index) => parameters[index].name);
    const signs = template.blocks.map(({ kind }) => (kind === 'light' ? ' > ' : ' < '));
    const order = names.reduce((text, name, f) => text + signs[f] + name);
    throw new InferenceError(
      'prior_order_impossible',
      `priors.${names[names.length - 1]}`,
      `the priors of ${names.join(', ')} leave no room for the order ${order}`,
      'let the ranges overlap, or exchange the priors',
    );
  }

  const free = parameters.flatMap((_, index) => (priors[index].kind === 'fixed' ? [] : [index]));
  if (free.length === 0) {
    throw new InferenceError(
      'nothing_to_sample',
      'priors',
      'every parameter is fixed',
      'free at least one parameter',
    );
  }
  const position = parameters.map((_, index) => free.indexOf(index));
  const base = new Float64Array(parameters.length);
  priors.forEach((prior, index) => {
    if (prior.kind === 'fixed') base[index] = prior.value;
  });
  const quadrature = withRole('quadrature');
  return {
    template,
    priors,
    free,
    position,
    base,
    masses,
    massPriors,
    massOrder,
    logOrderProbability: logOrder,
    angles,
    isotropic,
    coupling: parameters.findIndex((declaration) => declaration.role === 'coupling'),
    vertexAngle: parameters.findIndex((declaration) => declaration.role === 'vertex-angle'),
    amplitudes: perField('amplitude'),
    phases: perField('phase'),
    quadratures: template.blocks.flatMap((_, field) => {
      const pair = quadrature.filter((index) => parameters[index].field === field);
      return pair.length === 2 ? [[pair[0], pair[1]] as const] : [];
    }),
    background: parameters.flatMap(({ role }, index) => (isFixedColumn(role) ? [index] : [])),
  };
}

/** Whether a parameter is the coefficient of a column that hangs on no parameter. */
export const isFixedColumn = (role: ParameterRole): boolean => role === 'background' || role === 'column';

/** The prior of a sampled parameter that has a density of its own; null for fixed and isotropic ones. */
export function scalarPriorOf(layout: ParameterLayout, index: number): ScalarPrior | null {
  const prior = layout.priors[index];
  return isScalarPrior(prior) ? prior : null;
}

/** Range of masses that a field can have: the support of its prior, or its fixed value twice. */
export function massRange(prior: MassPrior): readonly [number, number] {
  return prior.kind === 'fixed' ? [prior.value, prior.value] : priorSupport(prior);
}

/**
 * Groups of sampled parameters (positions) that belong together: each field's own, the mixing (angles, coupling, vertex
 * angle), the background. Groups without sampled parameters are left out.
 */
export function parameterGroups(layout: ParameterLayout): number[][] {
  const { parameters, blocks } = layout.template;
  const own = (declaration: ParameterDeclaration, field: number): boolean => declaration.field === field;
  const groups = blocks.map((_, field) => parameters.flatMap((d, index) => (own(d, field) ? [index] : [])));
  const mixing = parameters.flatMap((d, index) =>
    d.field === null && !isFixedColumn(d.role) ? [index] : [],
  );
  return [...groups, mixing, [...layout.background]]
    .map((group) => group.map((index) => layout.position[index]).filter((position) => position >= 0))
    .filter((group) => group.length > 0);
}
