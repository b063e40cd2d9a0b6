import { CollapsedEvidence } from './scan/collapsed-evidence';
import { fillMoments, newMoments } from './scan/moments';
import { backgroundPriors, collapsedBlocks, comparingKind } from './scan/scan-model';
import { layOutParameters } from './parameter-layout';
import type { InferenceSpec } from './types';

/**
 * ln evidence where nothing has to be sampled for it: a template without fields whose coefficients have normal priors (or are fixed).
 * Exact up to rounding, about 1e-10; for covariances from mocks with the Sellentin–Heavens exponent in the matched one's place. Null for
 * anything else. Throws InferenceError as `buildInference` does.
 */
export function exactLogEvidence(spec: InferenceSpec): number | null {
  const { template, priors } = spec;
  const linear = template.parameters.every(({ name }) => ['normal', 'fixed'].includes(priors[name].kind));
  if (template.blocks.length > 0 || !linear) return null;
  const layout = layOutParameters(spec);
  const blocks = collapsedBlocks(spec, layout, comparingKind(spec.likelihood));
  const moments = blocks.map((block, b) => {
    const out = newMoments(block.fixed.length);
    fillMoments(block, b, [], out);
    return out;
  });
  const likelihoods = blocks.map(({ likelihood }) => likelihood);
  return new CollapsedEvidence(likelihoods, backgroundPriors(layout)).logEvidence(moments);
}
