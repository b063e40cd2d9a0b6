import { createRng } from '@/lib/sampler/rng';
import type { CompiledTemplate, Prior } from '@/lib/templates';
import { layOutParameters } from './parameter-layout';
import { buildDrawPrior } from './target';

/** Pointwise ranges of predictions: 68 and 95 % of the draws lie between them; each of the axis' length, dimensionless. */
export interface PredictiveBand {
  lo95: Float64Array;
  lo68: Float64Array;
  hi68: Float64Array;
  hi95: Float64Array;
}

/**
 * Pointwise quantiles 2.5, 16, 84 and 97.5 % (type 7) of the given predictions.
 *
 * @param predictions one array a draw, all of one length; at least one
 */
export function predictiveBand(predictions: readonly Float64Array[]): PredictiveBand {
  const length = predictions[0]?.length ?? 0;
  const band = {
    lo95: new Float64Array(length),
    lo68: new Float64Array(length),
    hi68: new Float64Array(length),
    hi95: new Float64Array(length),
  };
  const column = new Float64Array(predictions.length);
  const quantile = (p: number): number => {
    const at = p * (column.length - 1);
    const below = Math.floor(at);
    const above = Math.min(column.length - 1, below + 1);
    return column[below] + (at - below) * (column[above] - column[below]);
  };
  for (let i = 0; i < length; i += 1) {
    predictions.forEach((prediction, draw) => (column[draw] = prediction[i]));
    column.sort();
    band.lo95[i] = quantile(0.025);
    band.lo68[i] = quantile(0.16);
    band.hi68[i] = quantile(0.84);
    band.hi95[i] = quantile(0.975);
  }
  return band;
}

/**
 * What priors claim before any data: predictions of independent draws from the joint prior (masses in order), as a band.
 * The same seed gives the same band. Throws the InferenceError of a prior that doesn't fit the template.
 *
 * @param template compiled where the band is wanted
 * @param priors one a parameter, by name
 * @param count number of draws; 400 put the ends of the 95 % range within about a tenth of its half width
 */
export function priorPredictive(
  template: CompiledTemplate,
  priors: Readonly<Record<string, Prior>>,
  count = 400,
  seed = 'prior predictive',
): PredictiveBand {
  const layout = layOutParameters({ template, priors });
  const draw = buildDrawPrior(layout);
  const rng = createRng(seed);
  const full = Float64Array.from(layout.base);
  const predictions = Array.from({ length: count }, () => {
    draw(rng, full);
    return template.predict(full);
  });
  return predictiveBand(predictions);
}
