import { evidenceLikelihood } from './evidence-likelihood';
import { requireLength } from './inference-error';
import { buildLikelihood } from './likelihoods';
import { layOutParameters, massRange, parameterGroups } from './parameter-layout';
import { buildSpectralJump } from './spectral-jump';
import { buildChiSquare, buildTarget, fillIn, whitenBackground } from './target';
import type { Inference, InferenceSpec } from './types';
import { buildWhitenedField } from './whitened-field';
import { buildWhitening } from './whitening';

/**
 * Makes a posterior out of measurement, likelihood, template and priors: whitens once, tabulates the fields' columns,
 * lays the grids of the spectral jump (some tenths of a second for two fields). Deterministic. Throws InferenceError where
 * the priors, the data, the covariance or the number of mocks won't do.
 */
export function buildInference(spec: InferenceSpec): Inference {
  const { data, template } = spec;
  requireLength(spec);
  const layout = layOutParameters(spec);
  const whitening = buildWhitening(data);
  const likelihood = buildLikelihood(
    spec.likelihood,
    data.mockCount,
    whitening.length,
    layout.free.length,
    whitening.logDeterminant,
  );
  const fields = template.blocks.map((block, f) =>
    buildWhitenedField(block, whitening, massRange(layout.massPriors[f])),
  );
  const background = whitenBackground(layout, whitening);
  const chiSquareOf = buildChiSquare(layout, whitening, fields, background);
  const full = Float64Array.from(layout.base);
  const evidence = evidenceLikelihood(likelihood, data.mockCount, whitening.length, whitening.logDeterminant);
  return {
    target: { ...buildTarget(layout, likelihood, chiSquareOf), ...(evidence ? { evidence } : {}) },
    jumps: [buildSpectralJump(layout, likelihood, whitening, fields, background)],
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
      return chiSquareOf(full);
    },
    logOrderProbability: layout.logOrderProbability,
  };
}
