import { mcseMean } from '@/lib/sampler';
import type { Prior } from '@/lib/templates';
import { layOutParameters, massRange } from './parameter-layout';
import { lnPriorDensity } from './priors';
import { gaussLegendre, logSumExp } from './scan/quadrature-nodes';
import { buildCollapsedModel } from './scan/scan-model';
import type { InferenceSpec } from './types';

/** Widths at which the evidence is computed, in units of the prior's own. */
export const WIDTH_FACTORS: readonly number[] = [
  0.125, 0.177, 0.25, 0.354, 0.5, 0.707, 1, 1.414, 2, 2.828, 4, 5.657, 8,
];

/** ln Z at `factor` times the own width, less ln Z at the own one; null with the reason. */
export interface WidthPoint {
  factor: number;
  difference: number | null;
  error: number | null;
  because: string | null;
}

/** The normal priors about zero that are widened together: of all cosine and sine amplitudes, or of g. */
export interface AmplitudePriors {
  parameters: string[];
  sds: number[];
}

/** Null where the amplitudes, or g, don't all have normal priors about zero, which alone have one width. */
export function amplitudePriors({
  template,
  priors,
}: Pick<InferenceSpec, 'template' | 'priors'>): AmplitudePriors | null {
  const found = template.parameters.filter(({ role }) => role === 'quadrature' || role === 'coupling');
  const sds = found.flatMap(({ name }) => {
    const prior = priors[name];
    return prior.kind === 'normal' && prior.mean === 0 ? [prior.sd] : [];
  });
  if (found.length === 0 || sds.length < found.length) return null;
  return { parameters: found.map(({ name }) => name), sds };
}

function widened(spec: InferenceSpec, { parameters, sds }: AmplitudePriors, factor: number): InferenceSpec {
  const wide = parameters.map((name, i): [string, Prior] => [
    name,
    { kind: 'normal', mean: 0, sd: sds[i] * factor },
  ]);
  return { ...spec, priors: { ...spec.priors, ...Object.fromEntries(wide) } };
}

/** Nodes of a panel, panels of the first look, and how often they are halved at most. */
const NODES = 10;
const PANELS = 64;
const HALVINGS = 5;
/** Change of ln Z on halving below which the integral over the mass counts as exact. */
const SETTLED = 1e-5;

/**
 * ln Z(s)/Z(s₀) of one field with free cosine and sine amplitudes, integrated: amplitudes and background in closed form
 * (`CollapsedEvidence`), the mass by composite Gauss–Legendre quadrature, its panels halved until ln Z at the own width changes by
 * less than 1e-5. Null for any other template, for a prior of the mass without ends, and where the halving doesn't settle.
 */
export function exactWidths(
  spec: InferenceSpec,
  amplitudes: AmplitudePriors,
  factors: readonly number[] = WIDTH_FACTORS,
): WidthPoint[] | null {
  const { template } = spec;
  if (template.structure !== 'linear' || template.blocks.length !== 1) return null;
  const [mass] = layOutParameters(spec).massPriors;
  const [lo, hi] = massRange(mass);
  if (!Number.isFinite(hi - lo)) return null;
  const own = buildCollapsedModel(spec);
  const models = factors.map((factor) => buildCollapsedModel(widened(spec, amplitudes, factor)));
  const density = (mu: number) => (mass.kind === 'fixed' ? 0 : lnPriorDensity(mass, mu));
  const nodes = (panels: number) => {
    const node = (mu: number, logWeight: number) => ({ mu, logWeight, columns: [own.columns(0, mu)] });
    if (lo === hi) return [node(lo, 0)];
    return Array.from({ length: panels }, (_, k) =>
      gaussLegendre(lo + ((hi - lo) * k) / panels, lo + ((hi - lo) * (k + 1)) / panels, NODES),
    ).flatMap(({ at, weight }) => Array.from(at, (mu, i) => node(mu, Math.log(weight[i]) + density(mu))));
  };
  const integral = (model: typeof own, at: ReturnType<typeof nodes>): number =>
    logSumExp(
      at.map(({ mu, logWeight, columns }) => logWeight + (model.logEvidence([mu], 1, columns) ?? NaN)),
    );
  let panels = PANELS;
  let at = nodes(panels);
  let logZ = integral(own, at);
  for (let halving = 0; ; halving += 1) {
    panels *= 2;
    at = nodes(panels);
    const finer = integral(own, at);
    const change = Math.abs(finer - logZ);
    logZ = finer;
    if (change < SETTLED) break;
    if (halving === HALVINGS) return null;
  }
  return factors.map((factor, i) => ({
    factor,
    difference: integral(models[i], at) - logZ,
    error: 0,
    because: null,
  }));
}

/** Shape of the weights' tail, by Hill's estimator, above which their variance isn't finite. */
const HEAVIEST_TAIL = 0.5;
/** Weighted draws must be worth at least this share of all. */
const LEAST_SHARE = 0.02;

/**
 * Hill's estimator of the tail's shape from the largest √n·3 of n weights: mean of ln(w_i/w_cut). For a power law P(w > x) ∝ x^(−1/k) it
 * gives k; the variance of the weights is finite for k < ½.
 *
 * @see B. M. Hill, Ann. Statist. 3 (1975) 1163
 */
function tailShape(weights: Float64Array): number {
  const sorted = Float64Array.from(weights).sort().reverse();
  const count = Math.min(Math.floor(sorted.length / 5), Math.ceil(3 * Math.sqrt(sorted.length)));
  const cut = sorted[count];
  let sum = 0;
  for (let i = 0; i < count; i += 1) sum += Math.log(sorted[i] / cut);
  return sum / count;
}

/** Draws of a fit, one array a replica: the widened parameters in their order, and the ln likelihood that was sampled. */
export interface WidthDraws {
  parameters: readonly (readonly Float64Array[])[];
  logLikelihood: readonly Float64Array[];
  /** Exponent of the likelihood that evidences are of over the one that was sampled; 1 where they are the same. */
  exponent: number;
}

/**
 * ln Z(s)/Z(s₀) from draws of the posterior at s₀: the mean of Π N(c; 0, s)/N(c; 0, s₀) over them. Where evidences are of another power
 * of the likelihood both means carry L^(e − 1). The error is the Monte Carlo standard error of the ratio by the delta method. No
 * value where the weights' variance isn't finite, where they leave less than a fiftieth of the draws' worth, or without an error.
 */
export function reweightedWidths(
  { sds }: AmplitudePriors,
  { parameters, logLikelihood, exponent }: WidthDraws,
  factors: readonly number[] = WIDTH_FACTORS,
): WidthPoint[] {
  const top = logLikelihood.reduce((most, chain) => chain.reduce((a, b) => Math.max(a, b), most), -Infinity);
  const squares = logLikelihood.map((chain, m) =>
    chain.map((_, t) => parameters.reduce((sum, chains, i) => sum + (chains[m][t] / sds[i]) ** 2, 0)),
  );
  const base = logLikelihood.map((chain) => chain.map((value) => Math.exp((exponent - 1) * (value - top))));
  return factors.map((factor): WidthPoint => {
    if (factor === 1) return { factor, difference: 0, error: 0, because: null };
    const shift = -sds.length * Math.log(factor);
    const slope = 0.5 * (1 - 1 / factor ** 2);
    const logs = squares.map((chain) => chain.map((square) => shift + slope * square));
    const most = logs.reduce((a, chain) => chain.reduce((b, value) => Math.max(b, value), a), -Infinity);
    const weights = logs.map((chain, m) => chain.map((value, t) => base[m][t] * Math.exp(value - most)));
    return { factor, ...weighted(weights, base, most) };
  });
}

function weighted(
  weights: readonly Float64Array[],
  base: readonly Float64Array[],
  scale: number,
): Omit<WidthPoint, 'factor'> {
  const none = (because: string) => ({ difference: null, error: null, because });
  const all = Float64Array.from(weights.flatMap((chain) => Array.from(chain)));
  const sum = all.reduce((a, b) => a + b, 0);
  const squares = all.reduce((a, b) => a + b * b, 0);
  const bases = base.reduce((a, chain) => chain.reduce((b, value) => b + value, a), 0);
  if (all.length < 100) return none('too few draws are kept');
  if ((sum * sum) / squares < LEAST_SHARE * all.length)
    return none('the draws hardly reach where the posterior with this prior lies');
  if (tailShape(all) > HEAVIEST_TAIL) return none('a few draws would carry most of the weight');
  const ratio = sum / bases;
  const mean = bases / all.length;
  const error = mcseMean(
    weights.map((chain, m) => chain.map((w, t) => (w - ratio * base[m][t]) / (ratio * mean))),
  );
  if (!Number.isFinite(error)) return none('the replicas are too short for a Monte Carlo error');
  return { difference: Math.log(ratio) + scale, error, because: null };
}
