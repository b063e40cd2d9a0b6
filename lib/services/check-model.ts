import {
  calibrationProblem,
  rankDataset,
  summariseCalibration,
  type CalibrationProblem,
  type DatasetRanks,
} from '@/lib/inference/calibration';
import type { InferenceSpec } from '@/lib/inference';
import type { CalibrationResult, CheckRequest } from '@/lib/schemas';
import { samplerOfNewFits, samplerSettings } from './fit-sampler';
import { inferenceSpec } from './inference-spec';
import type { StoredNumbers } from './fit-model';

/** Recorded draws of warm-up of a check's chains: at full size the proofs of calibration mix with as many. */
export const checkWarmup = 200;

/** Simulated data sets of one stored block; no result depends on it. */
export const checkBlock = 5;

/** All that a thread needs to check. */
export interface CheckModel {
  numbers: StoredNumbers;
  request: CheckRequest;
}

/** What a check's request says is to be inferred. Reads nothing but its arguments. */
export function checkSpec({ numbers, request }: CheckModel): InferenceSpec {
  const { cuts, likelihood, template, priors, also, sharedMocks } = request;
  return inferenceSpec(numbers, { cuts, likelihood, template, priors, also, sharedMocks }).spec;
}

/** The calibration that a request asks for: the posterior of the notebook, sampled as its fits are. */
export function checkProblem(model: CheckModel): CalibrationProblem {
  return calibrationProblem(checkSpec(model), (blocks) =>
    samplerSettings({ warmup: model.request.warmup, sampler: samplerOfNewFits }, blocks),
  );
}

/** Ranks of the data sets from `first` to the end of its block: a function of the request and their numbers alone. */
export function rankBlock(problem: CalibrationProblem, request: CheckRequest, first: number): DatasetRanks[] {
  const { datasets, draws, seed } = request;
  const count = Math.min(checkBlock, datasets - first);
  return Array.from({ length: count }, (_, i) => rankDataset(problem, draws, String(seed), first + i));
}

/** What the ranks of all data sets come to, in their order. */
export function checkResult(found: readonly DatasetRanks[], { draws }: CheckRequest): CalibrationResult {
  const names = Object.keys(found[0].ranks);
  return {
    ...summariseCalibration(found, draws),
    ranks: Object.fromEntries(names.map((name) => [name, found.map(({ ranks }) => ranks[name])])),
  };
}
