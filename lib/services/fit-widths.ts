import { amplitudePriors, buildLikelihood, exactWidths, reweightedWidths } from '@/lib/inference';
import type { InferenceSpec } from '@/lib/inference';
import type { WidthCurve } from '@/lib/schemas';
import type { KeptDraws } from './fit-report';

/** Exponent of the likelihood that evidences are of over the sampled one. */
function evidenceExponent({ data, likelihood, template, priors }: InferenceSpec): number {
  const { mockCount } = data;
  if (likelihood !== 'matched-t' || mockCount === null) return 1;
  const free = template.parameters.filter(({ name }) => priors[name].kind !== 'fixed').length;
  const { exponent } = buildLikelihood(likelihood, mockCount, data.S.length, free, 0);
  return exponent === null ? 1 : mockCount / exponent;
}

/**
 * How a fit's evidence hangs on the width of the prior of its amplitudes, or of g: integrated where that is exact, else from
 * its own `kept` draws. Null where those priors don't have one width.
 */
export function widthsOf(spec: InferenceSpec, draws: KeptDraws, kept: number): WidthCurve | null {
  const amplitudes = amplitudePriors(spec);
  if (amplitudes === null || kept < 1) return null;
  const { parameters, sds } = amplitudes;
  const facts = { parameters, sd: sds[0] };
  const exact = exactWidths(spec, amplitudes);
  if (exact) return { ...facts, method: 'exact', points: exact };
  const chains = draws.chains(kept);
  const points = reweightedWidths(amplitudes, {
    parameters: parameters.map((name) => chains.get(name) ?? []),
    logLikelihood: draws.logLikelihood(kept),
    exponent: evidenceExponent(spec),
  });
  return { ...facts, method: 'reweighted', points };
}
