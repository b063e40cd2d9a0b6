/** Simulation-based calibration: whether posteriors of simulated data hold the truths as often as they say. Pure. */
export { rankBand, rankCounts } from './rank-bands';
export type { RankBand } from './rank-bands';
export { judgeRanks } from './verdict';
export type { CalibrationVerdict, RankShape, RankVerdict } from './verdict';
export { LOG_LIKELIHOOD, rankDataset } from './rank-dataset';
export type { CalibrationProblem, DatasetRanks } from './rank-dataset';
export { buildNoise, drawGamma } from './simulate';
