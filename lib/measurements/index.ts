export type * from './types';
export { findingCodes, remedies, type FindingCode } from './codes';
export { MeasurementError } from './errors';
export { MAX_BYTES } from './text';
export { parseMeasurement, type ParseOptions } from './parse-measurement';
export { parseMatrix, type MatrixOptions } from './parse-matrix';
export { recogniseColumns, type Recognition, type RecognisedColumn } from './columns';
export { applyMapping, summarise, type AppliedMapping } from './measurement';
export { shapeFactor } from './spectrum';
export { checkCovariance, permuteMatrix, type CovarianceCheck, type CovarianceOptions } from './covariance';
export { checkMockCount, covarianceFromMocks, hartlapFactor, type MockCovariance } from './mocks';
export { findSuspiciousPoints, type SuspiciousPoint } from './suspicious-points';
export { applyCuts, keptBins, type CutMeasurement, type Cuts, type ExcludedBin } from './cuts';
export { carryExcluded, type CarriedBins, type PlacedBin } from './excluded-bins';
export type { LinearColumn, TheoryInput, TheoryParts, Window } from './theory-parts';
export {
  MAX_BINS,
  preflight,
  type CovarianceSource,
  type PreflightInput,
  type PreflightPassed,
  type PreflightRefused,
  type PreflightResult,
  type UploadedFile,
} from './preflight';
