import { advance, createRng, essBulk, startReplica, type Rng, type SamplerSettings } from '@/lib/sampler';
import type { Inference } from '../types';
import { coveredLevels } from './interval-coverage';
import { LOG_LIKELIHOOD } from './quantity-name';

/** What is to be calibrated: how truths and data arise, and the posterior that is made of the data. */
export interface CalibrationProblem {
  /** A truth (sampled parameters, drawn from the prior) and data simulated at it. */
  draw(rng: Rng): { truth: Float64Array; data: Float64Array };
  /** The posterior of data. */
  fit(data: Float64Array): Pick<Inference, 'target' | 'jumps' | 'blocks'>;
  /**
   * ln likelihood whose rank is taken, where it isn't the posterior's own: a posterior that ignores its data ranks every
   * parameter well, and is found out by a likelihood only that doesn't.
   */
  logLikelihood?(data: Float64Array, x: Float64Array): number;
  settings(blocks: Inference['blocks']): SamplerSettings;
}

/** Ranks of one simulated dataset among L posterior draws, 0 to L. */
export interface DatasetRanks {
  /** By parameter, and of ln likelihood under `log likelihood`. */
  ranks: Record<string, number>;
  /** How many of `coverageLevels`' central intervals of the L draws hold the truth; by parameter. */
  covered: Record<string, number>;
  /** Draws made after warm-up. */
  made: number;
  /** Least effective size of them (bulk). The L that are kept are far enough apart once it is 2 L. */
  ess: number;
  /** False where the effective size wasn't reached within the limit of draws. */
  reached: boolean;
}

/** Draws at most, as a multiple of L. */
const MOST = 80;

/**
 * Ranks of the truth of simulated dataset k among L draws of one replica of the sampler. A function of seed and k alone,
 * so that datasets may be done in any order and anywhere.
 *
 * Draws are made until every quantity has an effective size of 2 L; L of them at equal distances then have 0.9 L or
 * more (a chain of correlation ρ a draw, kept at twice its autocorrelation time, keeps a correlation below 0.02).
 * Source: Talts, Betancourt, Simpson, Vehtari, Gelman (2018), arXiv:1804.06788; the likelihood as test quantity:
 * Modrák et al. (2023), Bayesian Analysis.
 */
export function rankDataset(problem: CalibrationProblem, L: number, seed: string, k: number): DatasetRanks {
  const rng = createRng(`${seed}/dataset/${k}`);
  const { truth, data } = problem.draw(rng);
  const { target, jumps, blocks } = problem.fit(data);
  const settings = problem.settings(blocks);
  const names = [LOG_LIKELIHOOD, ...target.names];
  const columns: number[][] = names.map(() => []);
  let state = startReplica(target, jumps, settings, `${seed}/posterior/${k}`, 0);
  state = advance(target, jumps, settings, state, settings.warmup).state;
  let ess = 0;
  while (ess < 2 * L && columns[0].length < MOST * L) {
    const step = advance(target, jumps, settings, state, 2 * (L + 1));
    state = step.state;
    const { values, width, count } = step.block;
    for (let i = 0; i < count; i += 1) {
      const x = values.subarray(i * width + 2, (i + 1) * width);
      columns[0].push(problem.logLikelihood?.(data, x) ?? values[i * width]);
      for (let j = 2; j < width; j += 1) columns[j - 1].push(values[i * width + j]);
    }
    ess = columns[0].length < 3 * L ? 0 : leastSize(columns);
  }
  const made = columns[0].length;
  const step = Math.floor(made / L);
  const truths = [problem.logLikelihood?.(data, truth) ?? target.logLikelihood(truth), ...truth];
  const ranks: Record<string, number> = {};
  const covered: Record<string, number> = {};
  names.forEach((name, q) => {
    const kept = Float64Array.from({ length: L }, (_, l) => columns[q][(l + 1) * step - 1]);
    let below = 0;
    let equal = 0;
    for (const value of kept) {
      if (value < truths[q]) below += 1;
      else if (value === truths[q]) equal += 1;
    }
    // Ties (a likelihood that is constant) are broken at random, or they would all be rank 0.
    ranks[name] = below + (equal > 0 ? Math.floor(rng.uniform() * (equal + 1)) : 0);
    if (q > 0) covered[name] = coveredLevels(kept, truths[q]);
  });
  return { ranks, covered, made, ess, reached: ess >= 2 * L };
}

/** Least bulk effective size of columns that move; a column that is constant says nothing of the chain. */
function leastSize(columns: readonly number[][]): number {
  let least = Infinity;
  for (const column of columns) {
    const size = essBulk([Float64Array.from(column)]);
    if (!Number.isNaN(size)) least = Math.min(least, size);
    else if (column.some((value) => value !== column[0])) return 0;
  }
  return least === Infinity ? 0 : least;
}
