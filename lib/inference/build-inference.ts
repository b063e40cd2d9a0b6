import { evidenceLikelihood } from './evidence-likelihood';
import { requireLength } from './inference-error';
import { compress } from './compressed';
import { buildMetric, type Metric } from './metric';
import { layOutParameters, massRange, parameterGroups, type ParameterLayout } from './parameter-layout';
import { buildSpectralJump } from './spectral-jump';
import { buildChiSquare, buildTarget, fillIn, whitenBackground } from './target';
import type { Inference, InferenceSpec } from './types';
import { buildWhitenedField, type WhitenedField } from './whitened-field';
import type { WhitenedData, Whitening } from './whitening';

/** The fields' columns; those of one form and range share one table. */
function whitenFields(layout: ParameterLayout, whitening: Whitening): WhitenedField[] {
  const { blocks } = layout.template;
  const ranges = layout.massPriors.map((prior) => massRange(prior));
  const fields: WhitenedField[] = [];
  blocks.forEach((block, f) => {
    const like = fields.findIndex(
      (_, g) => blocks[g].fill === block.fill && ranges[g].every((end, i) => end === ranges[f][i]),
    );
    fields.push(like >= 0 ? fields[like] : buildWhitenedField(block, whitening, ranges[f]));
  });
  return fields;
}

/**
 * Makes a posterior out of measurement, likelihood, template and priors: whitens once, tabulates the fields' columns,
 * lays the grids of the spectral jump (some tenths of a second for two fields). Deterministic. Throws InferenceError where
 * the priors, the data, the covariance or the number of mocks won't do.
 */
export function buildInference(spec: InferenceSpec): Inference {
  const { data, template } = spec;
  requireLength(spec);
  const layout = layOutParameters(spec);
  const whole = buildMetric(data, spec.likelihood, layout.free.length);
  const vectors = {
    whitening: whole.whitening,
    fields: whitenFields(layout, whole.whitening),
    background: whitenBackground(layout, whole.whitening),
  };
  // Parts of the data need χ² of their own, which other coordinates than theirs don't give.
  const { whitening, fields, background } = whole.parts.length === 1 ? compress(vectors) : vectors;
  const metric: Metric<WhitenedData> = { ...whole, whitening };
  const chiSquares = buildChiSquare(layout, metric, fields, background);
  const full = Float64Array.from(layout.base);
  const evidence = evidenceLikelihood(whole, data.mockCount);
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
