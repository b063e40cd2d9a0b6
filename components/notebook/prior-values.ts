import {
  isScalarPrior,
  priorCdf,
  priorMoments,
  priorSupport,
  type ScalarPrior,
} from '@/lib/inference/priors';
import { massChains } from '@/lib/inference/mass-order';
import type { CompiledTemplate, ParameterDeclaration, Prior } from '@/lib/templates';

/** Ends between which a parameter's slider runs: the prior's, or mean ± 4 sd where it has none. */
export function priorEnds(prior: Prior, declaration: ParameterDeclaration): [number, number] {
  if (prior.kind === 'isotropic') return [0, Math.PI / 2];
  if (prior.kind === 'fixed') return [prior.value, prior.value];
  const [lo, hi] = priorSupport(prior);
  const { mean, sd } = priorMoments(prior);
  return [
    Math.max(declaration.range[0], Number.isFinite(lo) ? lo : mean - 4 * sd),
    Math.min(declaration.range[1], Number.isFinite(hi) ? hi : mean + 4 * sd),
  ];
}

/** Value below which the prior puts the share p, by halving. */
export function priorQuantile(prior: ScalarPrior, p: number): number {
  const [from, to] = priorSupport(prior);
  const { mean, sd } = priorMoments(prior);
  let lo = Number.isFinite(from) ? from : mean - 12 * sd;
  let hi = Number.isFinite(to) ? to : mean + 12 * sd;
  for (let step = 0; step < 60; step += 1) {
    const middle = 0.5 * (lo + hi);
    if (priorCdf(prior, middle) < p) lo = middle;
    else hi = middle;
  }
  return 0.5 * (lo + hi);
}

/** Roles whose median of zero would draw no oscillation at all. */
const sized = new Set(['quadrature', 'amplitude', 'coupling']);

/**
 * Where sliders start: medians of the priors, masses of one prior spread over it in order. What sets the size of an
 * oscillation starts at its upper quartile where the median is zero, because a flat line shows nothing.
 */
export function startValues(
  { parameters, blocks }: Pick<CompiledTemplate, 'parameters' | 'blocks'>,
  priors: Readonly<Record<string, Prior>>,
): Float64Array {
  const chains = massChains(blocks.map(({ kind }) => kind)).map((chain) => chain.map((f) => blocks[f].mass));
  const x = Float64Array.from(parameters, (declaration, i) => {
    const prior = priors[declaration.name] ?? declaration.defaultPrior;
    if (prior.kind === 'fixed') return prior.value;
    if (!isScalarPrior(prior)) return Math.PI / 4;
    if (declaration.role === 'mass') {
      const own = chains.find((chain) => chain.includes(i)) ?? [i];
      return priorQuantile(prior, (own.indexOf(i) + 1) / (own.length + 1));
    }
    const median = priorQuantile(prior, 0.5);
    if (declaration.role === 'quadrature' && declaration.name.startsWith('b')) return tidy(median);
    return sized.has(declaration.role) && Math.abs(median) < 1e-9 ? priorQuantile(prior, 0.75) : tidy(median);
  });
  return inOrder(x, chains);
}

const tidy = (value: number): number => (Math.abs(value) < 1e-9 ? 0 : value);

/** Masses of each kind in order, as the template counts its fields. */
function inOrder(x: Float64Array, chains: readonly (readonly number[])[]): Float64Array {
  for (const places of chains) {
    const sorted = places.map((i) => x[i]).sort((a, b) => a - b);
    places.forEach((place, i) => (x[place] = sorted[i]));
  }
  return x;
}

/** A step of about a four-hundredth of the span, 1, 2 or 5 of a decimal place. */
export function sliderStep(lo: number, hi: number): number {
  const span = hi - lo;
  if (!(span > 0)) return 1;
  const raw = span / 400;
  const unit = 10 ** Math.floor(Math.log10(raw));
  const mantissa = raw / unit;
  return Number(((mantissa < 1.5 ? 1 : mantissa < 3.5 ? 2 : mantissa < 7.5 ? 5 : 10) * unit).toPrecision(1));
}
