import { comparingKind } from './scan/scan-model';
import { CollapsedEvidence } from './scan/collapsed-evidence';
import { linearPrior } from './scan/linear-prior';
import { newMoments } from './scan/moments';
import { buildLikelihood } from './likelihoods';
import { layOutParameters, scalarPriorOf } from './parameter-layout';
import { whitenBackground } from './target';
import type { InferenceSpec } from './types';
import { buildWhitening } from './whitening';

/**
 * ln evidence where nothing has to be sampled for it: a template without fields whose coefficients have normal priors (or are fixed).
 * Exact up to rounding, about 1e-10; for covariances from mocks with the Sellentin–Heavens exponent in the matched one's place. Null for
 * anything else. Throws InferenceError as `buildInference` does.
 */
export function exactLogEvidence(spec: InferenceSpec): number | null {
  const { data, template, priors } = spec;
  const linear = template.parameters.every(({ name }) => ['normal', 'fixed'].includes(priors[name].kind));
  if (template.blocks.length > 0 || !linear) return null;
  const layout = layOutParameters(spec);
  const whitening = buildWhitening(data);
  const p = whitening.length;
  const background = whitenBackground(layout, whitening);
  const rest = Float64Array.from(whitening.data);
  const columns: Float64Array[] = [];
  layout.background.forEach((index, j) => {
    const column = background.subarray(j * p, (j + 1) * p);
    if (layout.position[index] >= 0) columns.push(column);
    else column.forEach((value, i) => (rest[i] -= layout.base[index] * value));
  });
  const dot = (a: Float64Array, b: Float64Array) => a.reduce((sum, value, i) => sum + value * b[i], 0);
  const moments = newMoments(columns.length);
  columns.forEach((column, i) => {
    moments.linear[i] = dot(column, rest);
    for (let j = 0; j <= i; j += 1) moments.gram[i * columns.length + j] = dot(column, columns[j]);
  });
  moments.square = dot(rest, rest);
  const kind = comparingKind(spec.likelihood);
  const { length } = layout.free;
  const likelihood = buildLikelihood(kind, data.mockCount, p, length, whitening.logDeterminant);
  const own = layout.background.flatMap((index) => {
    const prior = scalarPriorOf(layout, index);
    return prior ? [linearPrior(prior)] : [];
  });
  return new CollapsedEvidence([likelihood], own).logEvidence([moments]);
}
