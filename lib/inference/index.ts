/** Measurement, template, priors and likelihood made into a posterior to sample. Pure. */
export type * from './types';
export { InferenceError } from './inference-error';
export type { InferenceErrorCode } from './inference-error';
export { assemble, assembleData, likelihoodFor } from './assembly';
export type { Assembly, AssemblyPart } from './assembly';
export { assembledParameters, assembleTemplate, theoryOfPart } from './assembled-template';
export type { AssemblyColumn, PartModel } from './assembled-template';
export { buildInference } from './build-inference';
export { exactLogEvidence } from './exact-evidence';
export { amplitudePriors, exactWidths, reweightedWidths } from './width-evidence';
export type { WidthDraws, WidthPoint } from './width-evidence';
export { buildMetric } from './metric';
export type { LikelihoodPart, Metric } from './metric';
export { buildLikelihood, matchedExponent } from './likelihoods';
export type { Likelihood } from './likelihoods';
export {
  drawFromPrior,
  isScalarPrior,
  lnPriorDensity,
  priorCdf,
  priorMoments,
  priorSupport,
  sketchPrior,
  validatePrior,
} from './priors';
export type { ScalarPrior } from './priors';
export { logOrderProbability, orderedMarginal } from './ordered-masses';
export { inducedMarginals, massChains } from './mass-order';
export type { OrderedMarginal } from './ordered-masses';
export { predictiveBand, priorPredictive } from './prior-predictive';
export type { PredictiveBand } from './prior-predictive';
export { bestDraw, coverageFacts, jointCoverage, posteriorBand } from './summary';
export type { CoverageFacts } from './summary';
