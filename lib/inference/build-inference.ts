import { evidenceLikelihood } from './evidence-likelihood';
import { requireLength } from './inference-error';
import { buildMetric } from './metric';
import { layOutParameters, massRange, parameterGroups } from './parameter-layout';
import { buildSpectralJump } from './spectral-jump';
import { buildChiSquare, buildTarget, fillIn, whitenBackground } from './target';
import type { Inference, InferenceSpec } from './types';
import { buildWhitenedField } from './whitened-field';

/**
 * Makes a posterior out of measurement, likelihood, template and priors: whitens once, tabulates the fields' columns,
 * lays the grids of the spectral jump (some tenths of a second for two fields). Deterministic. Throws InferenceError where
 * the priors, the data, the covariance or the number of mocks won't do.
 */
export function buildInference(spec: InferenceSpec): Inference {
  const { data, template } = spec;
  requireLength(spec);
  const layout = layOutParameters(spec);
  const metric = buildMetric(data, spec.likelihood, layout.free.length);
  const { whitening } = metric;
  const fields = template.blocks.map((block, f) =>
    buildWhitenedField(block, whitening, massRange(layout.massPriors[f])),
  );
  const background = whitenBackground(layout, whitening);
  const chiSquares = buildChiSquare(layout, metric, fields, background);
  const full = Float64Array.from(layout.base);
  const evidence = evidenceLikelihood(metric, data.mockCount);
  return {
    target: { ...buildTarget(layout, metric, chiSquares), ...(evidence ? { evidence } : {}) },
    jumps: [buildSpectralJump(layout, metric, fields, background)],
    blocks: parameterGroups(layout),
    sampled: layout.free.map((index) => template.parameters[index]),
    expand(x, out) {
      const vector = out ?? new Float64Array(layout.base.length);
      vector.set(layout.base);
      fillIn(layout, x, vector);
      return vector;
    },
    chiSquare(x) {
      fillIn(layout, x, full);
      return chiSquares.total(full);
    },
    logOrderProbability: layout.logOrderProbability,
  };
}
