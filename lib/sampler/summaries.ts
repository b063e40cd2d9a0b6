/** Point summaries of draws, over all replicas together. */
import { poolDraws, sortedQuantile } from './diagnostics/chain-set';
import { meanOf, varianceOf } from './diagnostics/effective-size';

/** Mean, sd (divisor n − 1) and quantiles of type 7, in the units of the draws. */
export interface Summary {
  mean: number;
  sd: number;
  q2_5: number;
  q16: number;
  q50: number;
  q84: number;
  q97_5: number;
}

/** Summary of all draws of all chains; NaN where there are too few draws or one of them is NaN. */
export function summarise(chains: readonly Float64Array[]): Summary {
  const sorted = poolDraws(chains).sort();
  // Typed arrays sort NaN last: one look finds it.
  const valid = sorted.length > 0 && !Number.isNaN(sorted[sorted.length - 1]);
  const quantile = (p: number) => (valid ? sortedQuantile(sorted, p) : NaN);
  return {
    mean: meanOf(sorted),
    sd: Math.sqrt(varianceOf(sorted)),
    q2_5: quantile(0.025),
    q16: quantile(0.16),
    q50: quantile(0.5),
    q84: quantile(0.84),
    q97_5: quantile(0.975),
  };
}

/** Centre and concentration of draws on a circle (Mardia and Jupp 2000, Directional Statistics, chapter 2). */
export interface CircularSummary {
  /** Direction of the mean vector, in (−period/2, period/2]; NaN where the resultant is 0. */
  mean: number;
  /** Length of the mean vector, 0 (spread evenly) to 1 (one point). */
  resultant: number;
  /** Circular standard deviation √(−2 ln resultant), in the units of the draws. */
  sd: number;
}

/** Circular mean, resultant length and sd of all draws of all chains on a circle of the given period; NaN if empty. */
export function summariseCircle(chains: readonly Float64Array[], period: number): CircularSummary {
  const turn = (2 * Math.PI) / period;
  let cosine = 0;
  let sine = 0;
  let count = 0;
  for (const chain of chains) {
    for (let i = 0; i < chain.length; i++) {
      cosine += Math.cos(turn * chain[i]);
      sine += Math.sin(turn * chain[i]);
    }
    count += chain.length;
  }
  const resultant = Math.min(Math.hypot(cosine, sine) / count, 1);
  const direction = Math.atan2(sine, cosine);
  return {
    mean: resultant > 0 ? (direction <= -Math.PI ? period / 2 : direction / turn) : NaN,
    resultant,
    sd: Math.sqrt(2 * Math.log(1 / resultant)) / turn,
  };
}
