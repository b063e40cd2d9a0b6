import { LinearModel } from './collapsed';
import { greedyGain } from './greedy-gain';
import type { Metric } from './metric';
import type { ParameterLayout } from './parameter-layout';
import type { WhitenedField } from './whitened-field';
import type { WhitenedData } from './whitening';

interface Tail {
  exponent: number;
  spread: number;
}

/**
 * The normal model that the spectral jump proposes by. For a t likelihood it is the normal one whose covariance is C/λ, λ = m/(N − 1 + χ²)
 * at the χ² of the best masses: the curvature of the t form at its best fit.
 *
 * Of several parts each has its own λ_k, with the χ² shared out among them by their numbers of values; they go into the whitening. Where
 * all are t forms their product is stood in for by one t in Q = Σ λ_k χ²_k, exponent Σ m_k and spread Σ λ_k (N_k − 1), which has the
 * product's slope at the best fit. The jump's ratio corrects all of this.
 */
export function referenceModel(
  layout: ParameterLayout,
  metric: Metric<WhitenedData>,
  fields: readonly WhitenedField[],
  background: Float64Array,
): LinearModel {
  const polar = layout.template.structure === 'polar' || layout.template.structure === 'mixed-polar';
  const { whitening, parts } = metric;
  if (parts.length > 1) return jointModel(layout, metric, fields, background, polar);
  const make = (weight: number, tail: Tail | null): LinearModel =>
    new LinearModel(layout, whitening, fields, background, weight, tail, polar);
  const { exponent, spread, scale } = parts[0].likelihood;
  if (exponent === null || spread === null) return make(scale, null);
  const first = make(exponent / (spread + whitening.length), null);
  const chiSquare = Math.max(0, first.baseQuadratic - 2 * greedyGain(layout, first)) / first.weight;
  return make(exponent / (spread + chiSquare), { exponent, spread });
}

function jointModel(
  layout: ParameterLayout,
  metric: Metric<WhitenedData>,
  fields: readonly WhitenedField[],
  background: Float64Array,
  polar: boolean,
): LinearModel {
  const { parts } = metric;
  const make = (weights: readonly number[], tail: Tail | null): LinearModel => {
    const scaled = scaledBy(metric, weights, fields, background);
    return new LinearModel(layout, scaled.whitening, scaled.fields, scaled.background, 1, tail, polar);
  };
  const weightsAt = (perValue: number): number[] =>
    parts.map(({ from, to, likelihood: { exponent, spread, scale } }) =>
      exponent === null || spread === null ? scale : exponent / (spread + perValue * (to - from)),
    );
  const normal = parts.every(({ likelihood }) => likelihood.exponent === null);
  const expected = weightsAt(1);
  const first = make(expected, null);
  if (normal) return first;
  const size = parts.reduce((sum, { from, to }, k) => sum + expected[k] * (to - from), 0);
  const left = Math.max(0, first.baseQuadratic - 2 * greedyGain(layout, first));
  const weights = weightsAt(left / size);
  return make(weights, tailOf(metric, weights));
}

/** One t in place of the product of all; null where a part is normal, whose tail none of that form has. */
function tailOf({ parts }: Pick<Metric, 'parts'>, weights: readonly number[]): Tail | null {
  let tail = { exponent: 0, spread: 0 };
  for (const [k, { likelihood }] of parts.entries()) {
    const { exponent, spread } = likelihood;
    if (exponent === null || spread === null) return null;
    tail = { exponent: tail.exponent + exponent, spread: tail.spread + weights[k] * spread };
  }
  return tail;
}

/** Whitened data and columns with every part's weight in them: χ² becomes Σ_k w_k χ²_k. */
function scaledBy(
  { whitening, parts }: Metric<WhitenedData>,
  weights: readonly number[],
  fields: readonly WhitenedField[],
  background: Float64Array,
) {
  const p = whitening.length;
  const factors = new Float64Array(p);
  let logWeight = 0;
  parts.forEach(({ from, to }, k) => {
    factors.fill(Math.sqrt(weights[k]), from, to);
    logWeight += (to - from) * Math.log(weights[k]);
  });
  const scale = (values: Float64Array, out: Float64Array): Float64Array => {
    for (let at = 0; at < values.length; at += p) {
      for (let i = 0; i < p; i += 1) out[at + i] = values[at + i] * factors[i];
    }
    return out;
  };
  const scaled = (values: Float64Array): Float64Array => scale(values, new Float64Array(values.length));
  return {
    whitening: {
      ...whitening,
      data: scaled(whitening.data),
      logDeterminant: whitening.logDeterminant - logWeight,
    },
    background: scaled(background),
    fields: fields.map((field): WhitenedField => {
      const out = new Float64Array(field.width * p);
      return { ...field, sample: null, at: (mass) => scale(field.at(mass), out) };
    }),
  };
}
