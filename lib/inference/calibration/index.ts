/** Simulation-based calibration: whether posteriors of simulated data hold the truths as often as they say. Pure. */
export { binomialBounds, rankBand, rankCounts } from './rank-bands';
export type { RankBand } from './rank-bands';
export { judgeRanks, rankShapes } from './verdict';
export type { CalibrationVerdict, RankShape, RankVerdict } from './verdict';
export { LOG_LIKELIHOOD } from './quantity-name';
export { rankDataset } from './rank-dataset';
export type { CalibrationProblem, DatasetRanks } from './rank-dataset';
export { buildNoise, drawGamma } from './simulate';
export { coverageLevels, coveredLevels, countCoverage, expectedCoverage } from './interval-coverage';
export type { IntervalCoverage } from './interval-coverage';
export { calibrationProblem } from './notebook-problem';
export { calibrationAlpha, rankIntervals, summariseCalibration } from './summarise';
export type { CalibrationSummary } from './summarise';
export { shapeWords, unmixedWords, verdictWords } from './words';
