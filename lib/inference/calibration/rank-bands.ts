import { logGamma } from '@/lib/sampler';

/** Bounds of the counts of ranks below i (L + 1)/K, i = 1 … K − 1, that hold all at once. Counts of N. */
export interface RankBand {
  /** Probability outside each single pair of bounds (both sides together). */
  gamma: number;
  lower: number[];
  upper: number[];
  /** Probability that uniform ranks keep within all of them; at least 1 − α, more because counts are whole. */
  coverage: number;
}

/**
 * Simultaneous bounds of the empirical distribution of N uniform ranks at i/K: the quantiles γ/2 and 1 − γ/2 of
 * Binomial(N, i/K), with the largest γ at which all hold with probability 1 − α or more. That probability is exact, by
 * recursion over i: given k ranks below (i − 1)/K, those between are Binomial(N − k, 1/(K − i + 1)).
 * Source: Säilynoja, Bürkner, Vehtari (2022), Statistics and Computing 32, 32.
 *
 * @param N number of ranks, at least 1
 * @param K intervals, at least 2
 * @param alpha in (0, 1): how often calibrated ranks may leave the band
 */
export function rankBand(N: number, K: number, alpha: number): RankBand {
  if (!(Number.isInteger(N) && N >= 1 && Number.isInteger(K) && K >= 2 && alpha > 0 && alpha < 1)) {
    throw new RangeError(`no band for ${N} ranks in ${K} intervals at ${alpha}`);
  }
  const lnChoose = lnFactorials(N);
  let low = Math.log(alpha / (4 * K));
  let high = Math.log(alpha * 1.0001);
  let best = bandAt(N, K, Math.exp(low), lnChoose);
  for (let round = 0; round < 40; round += 1) {
    const middle = (low + high) / 2;
    const band = bandAt(N, K, Math.exp(middle), lnChoose);
    if (band.coverage >= 1 - alpha) {
      low = middle;
      best = band;
    } else high = middle;
  }
  return best;
}

/** How many of the ranks lie below i (L + 1)/K, i = 1 … K − 1, compared in whole numbers. */
export function rankCounts(ranks: readonly number[], L: number, K: number): number[] {
  return Array.from({ length: K - 1 }, (_, i) => ranks.filter((r) => r * K < (i + 1) * (L + 1)).length);
}

/**
 * Quantiles γ/2 and 1 − γ/2 of Binomial(N, p): a count leaves them with probability γ or less.
 *
 * @param N trials, at least 1
 * @param p in (0, 1)
 * @param gamma in (0, 1)
 */
export function binomialBounds(N: number, p: number, gamma: number): [number, number] {
  if (!(Number.isInteger(N) && N >= 1 && p > 0 && p < 1 && gamma > 0 && gamma < 1)) {
    throw new RangeError(`no bounds for ${N} trials of ${p} at ${gamma}`);
  }
  return bounds(N, p, gamma / 2, lnFactorials(N));
}

function lnFactorials(N: number): Float64Array {
  return Float64Array.from({ length: N + 1 }, (_, k) => logGamma(k + 1));
}

/** Binomial(n, p) at k; `ln` holds ln k!. */
function binomial(n: number, k: number, p: number, ln: Float64Array): number {
  if (p >= 1) return k === n ? 1 : 0;
  return Math.exp(ln[n] - ln[k] - ln[n - k] + k * Math.log(p) + (n - k) * Math.log1p(-p));
}

/** Smallest k whose cumulative probability reaches the level, from both ends so that small tails keep their digits. */
function bounds(N: number, p: number, tail: number, ln: Float64Array): [number, number] {
  let lower = 0;
  for (let sum = binomial(N, 0, p, ln); sum < tail; sum += binomial(N, lower, p, ln)) lower += 1;
  let upper = N;
  for (let sum = binomial(N, N, p, ln); sum <= tail; sum += binomial(N, upper, p, ln)) upper -= 1;
  return [lower, upper];
}

function bandAt(N: number, K: number, gamma: number, ln: Float64Array): RankBand {
  const pairs = Array.from({ length: K - 1 }, (_, i) => bounds(N, (i + 1) / K, gamma / 2, ln));
  let inside = new Float64Array(N + 1);
  inside[0] = 1;
  let from: [number, number] = [0, 0];
  pairs.forEach((pair, i) => {
    const next = new Float64Array(N + 1);
    for (let k = from[0]; k <= from[1]; k += 1) {
      for (let to = Math.max(k, pair[0]); to <= pair[1]; to += 1) {
        next[to] += inside[k] * binomial(N - k, to - k, 1 / (K - i), ln);
      }
    }
    inside = next;
    from = pair;
  });
  return {
    gamma,
    lower: pairs.map(([lower]) => lower),
    upper: pairs.map(([, upper]) => upper),
    coverage: inside.reduce((sum, part) => sum + part, 0),
  };
}
