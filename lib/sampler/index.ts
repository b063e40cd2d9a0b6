export type * from './types';
export { SamplerError } from './errors';
export type { SamplerErrorCode } from './errors';
export { createRng, replicaSeed, restoreRng } from './rng';
export { betaProbability, betaQuantile, logGamma, normalQuantile } from './special-functions';
export {
  diagnose,
  essBulk,
  essMean,
  essQuantile,
  essSd,
  essTail,
  mcseMean,
  mcseQuantile,
  mcseSd,
  rhat,
} from './diagnostics';
export type { Diagnosis } from './diagnostics';
export type { NonFinite } from './diagnostics/chain-set';
export { summarise, summariseCircle } from './summaries';
export type { CircularSummary, Summary } from './summaries';
export { DEFAULT_GATE, DEFAULT_MIN_DRAWS, judgeGate } from './gate';
export type { GateEvidence, GateTarget, GateVerdict } from './gate';
export { evidenceOf, LEAST_DOF, stonesOf } from './evidence';
export type { Evidence, NoEvidence } from './evidence';
export { barrierOf, rejectionRates } from './ladder';
export { advance, sample, startReplica } from './replica';
export type { Advance } from './replica';
export { wrap } from './point';
