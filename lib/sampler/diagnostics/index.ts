/**
 * Convergence diagnostics of one scalar quantity: M chains of N draws each, `chains[m][n]`.
 *
 * Source of all: Vehtari, Gelman, Simpson, Carpenter, Bürkner (2021), "Rank-normalization, folding, and
 * localization: an improved R-hat for assessing convergence of MCMC", Bayesian Analysis 16, 667.
 *
 * Every function gives NaN where the quantity is undefined: no draws, a draw that is NaN or infinite, all draws
 * equal, chains that don't move, split chains of fewer than 6 draws (for R-hat 2). Chains of unequal length are a RangeError.
 */
import { betaQuantile } from '../special-functions';
import { ChainSet, sortedQuantile } from './chain-set';
import type { NonFinite } from './chain-set';
import { effectiveSize, meanOf, plainRhat, SHORTEST_CHAIN, varianceOf } from './effective-size';

type Chains = readonly Float64Array[];

/** Φ(−1) and Φ(1) to the seven digits that the definition of the quantile's error uses. */
const ONE_SIGMA = [0.1586553, 0.8413447] as const;

function rhatOf(set: ChainSet, bulk: Chains): number {
  const tails = set.rankNormalisedDistances(sortedQuantile(set.sorted, 0.5));
  // All draws at one distance from the median (two values only): the spread can't differ between chains.
  return tails === null ? plainRhat(bulk) : Math.max(plainRhat(bulk), plainRhat(tails));
}

function essOfQuantile(set: ChainSet, p: number): number {
  const bound = sortedQuantile(set.sorted, p);
  return effectiveSize(set.indicators(bound));
}

function mcseOfQuantile(set: ChainSet, p: number): number {
  const ess = essOfQuantile(set, p);
  if (Number.isNaN(ess)) return NaN;
  const sorted = set.sorted;
  const [low, high] = ONE_SIGMA.map((q) => betaQuantile(q, ess * p + 1, ess * (1 - p) + 1));
  const above = sorted[Math.min(Math.ceil(high * sorted.length), sorted.length) - 1];
  const below = sorted[Math.max(Math.floor(low * sorted.length), 1) - 1];
  return (above - below) / 2;
}

/** Mean, sd (divisor n − 1) and, for a given ess of (x − mean)², the standard error of the sd. */
function moments(set: ChainSet): { mean: number; sd: number; sdError: (ess: number) => number } {
  const all = set.sorted;
  const mean = meanOf(all);
  let second = 0;
  let fourth = 0;
  for (let i = 0; i < all.length; i++) {
    const square = (all[i] - mean) ** 2;
    second += square;
    fourth += square * square;
  }
  second /= all.length;
  fourth /= all.length;
  const sdError = (ess: number) => Math.sqrt((fourth - second * second) / (4 * second * ess));
  return { mean, sd: Math.sqrt(varianceOf(all)), sdError };
}

/** Rank-normalised split R-hat: the larger of that of the draws and that of their distances from the median. */
export function rhat(chains: Chains): number {
  const set = new ChainSet(chains);
  return set.empty ? NaN : rhatOf(set, set.rankNormalised());
}

/** Bulk effective sample size: of the rank-normalised split chains. */
export function essBulk(chains: Chains): number {
  const set = new ChainSet(chains);
  return set.empty ? NaN : effectiveSize(set.rankNormalised());
}

/** Tail effective sample size: the smaller of those of the 5 % and 95 % quantiles. */
export function essTail(chains: Chains): number {
  const set = new ChainSet(chains);
  return set.empty ? NaN : Math.min(essOfQuantile(set, 0.05), essOfQuantile(set, 0.95));
}

/** Effective sample size for the mean: split chains, values as they are. Needs a finite variance. */
export function essMean(chains: Chains): number {
  const set = new ChainSet(chains);
  return set.empty ? NaN : effectiveSize(set.split);
}

/** Effective sample size for the quantile at p in [0, 1]: of the split indicators x ≤ q_p. */
export function essQuantile(chains: Chains, p: number): number {
  const set = new ChainSet(chains);
  return set.empty ? NaN : essOfQuantile(set, p);
}

/** Effective sample size for the standard deviation: of |x − mean|, split. */
export function essSd(chains: Chains): number {
  const set = new ChainSet(chains);
  return set.empty ? NaN : effectiveSize(set.distances(meanOf(set.sorted)));
}

/** Monte Carlo standard error of the mean, sd / √essMean, in the units of the draws. */
export function mcseMean(chains: Chains): number {
  const set = new ChainSet(chains);
  return set.empty ? NaN : Math.sqrt(varianceOf(set.sorted) / effectiveSize(set.split));
}

/**
 * Monte Carlo standard error of the standard deviation, √[(m₄ − m₂²)/(4 m₂ E)] by the delta method, with the central
 * moments m (divisor n) and E the effective sample size of the split (x − mean)².
 */
export function mcseSd(chains: Chains): number {
  const set = new ChainSet(chains);
  if (set.empty) return NaN;
  const { mean, sdError } = moments(set);
  return sdError(effectiveSize(set.squaredDistances(mean)));
}

/** Monte Carlo standard error of the quantile at p in [0, 1]: half the distance of the order statistics one sigma away. */
export function mcseQuantile(chains: Chains, p: number): number {
  const set = new ChainSet(chains);
  return set.empty ? NaN : mcseOfQuantile(set, p);
}

/** All diagnostics of one quantity. Numbers without a value are NaN. */
export interface Diagnosis {
  chains: number;
  /** Draws of each chain. */
  draws: number;
  /** Draws that are NaN or infinite, or null. Every number below is NaN where there are any. */
  nonFinite: NonFinite | null;
  /** Every draw is the same number: mean and quantiles are given, nothing else. */
  constant: boolean;
  /** The split chains have fewer than 6 draws, so that no effective sample size exists. */
  tooShort: boolean;
  mean: number;
  sd: number;
  q2_5: number;
  q16: number;
  q50: number;
  q84: number;
  q97_5: number;
  rhat: number;
  essBulk: number;
  essTail: number;
  essMean: number;
  essSd: number;
  mcseMean: number;
  mcseSd: number;
  mcseQ2_5: number;
  mcseQ16: number;
  mcseQ50: number;
  mcseQ84: number;
  mcseQ97_5: number;
}

/** Everything above for one quantity at once: sorted once, ranks and split chains shared. */
export function diagnose(chains: Chains): Diagnosis {
  const set = new ChainSet(chains);
  const draws = chains.length > 0 ? chains[0].length : 0;
  const valid = set.nonFinite === null && set.sorted.length > 0;
  const quantile = (p: number) => (valid ? sortedQuantile(set.sorted, p) : NaN);
  const result: Diagnosis = {
    chains: chains.length,
    draws,
    nonFinite: set.nonFinite,
    constant: valid && set.constant,
    tooShort: Math.floor(draws / 2) < SHORTEST_CHAIN,
    mean: valid ? meanOf(set.sorted) : NaN,
    sd: valid ? Math.sqrt(varianceOf(set.sorted)) : NaN,
    q2_5: quantile(0.025),
    q16: quantile(0.16),
    q50: quantile(0.5),
    q84: quantile(0.84),
    q97_5: quantile(0.975),
    rhat: NaN,
    essBulk: NaN,
    essTail: NaN,
    essMean: NaN,
    essSd: NaN,
    mcseMean: NaN,
    mcseSd: NaN,
    mcseQ2_5: NaN,
    mcseQ16: NaN,
    mcseQ50: NaN,
    mcseQ84: NaN,
    mcseQ97_5: NaN,
  };
  if (set.empty) return result;
  const bulk = set.rankNormalised();
  const { mean, sd, sdError } = moments(set);
  result.rhat = rhatOf(set, bulk);
  result.essBulk = effectiveSize(bulk);
  result.essTail = Math.min(essOfQuantile(set, 0.05), essOfQuantile(set, 0.95));
  result.essMean = effectiveSize(set.split);
  result.essSd = effectiveSize(set.distances(mean));
  result.mcseMean = sd / Math.sqrt(result.essMean);
  result.mcseSd = sdError(effectiveSize(set.squaredDistances(mean)));
  result.mcseQ2_5 = mcseOfQuantile(set, 0.025);
  result.mcseQ16 = mcseOfQuantile(set, 0.16);
  result.mcseQ50 = mcseOfQuantile(set, 0.5);
  result.mcseQ84 = mcseOfQuantile(set, 0.84);
  result.mcseQ97_5 = mcseOfQuantile(set, 0.975);
  return result;
}
