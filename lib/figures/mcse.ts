/** Density of the standard normal at its quantiles 0.025, 0.16 and 0.5. */
const normalDensity = { 0.025: 0.0584451, 0.16: 0.2432, 0.5: 0.3989423 } as const;

/** Quantiles that the table of marginals reports, by the nearer end. */
export type ReportedTail = keyof typeof normalDensity;

/**
 * Monte Carlo standard error of a quantile, √(p(1 − p)/n) / f(q), with the density f of a normal of the same standard
 * deviation; the digits that are shown hang on its order alone.
 *
 * @param tail p or 1 − p, the smaller
 * @param facts standard deviation and Monte Carlo error of the mean, in the parameter's unit; effective sample size of the
 *   tails where it is known
 * @returns in the parameter's unit; NaN where either is unknown. The median takes n from the error of the mean, n =
 *   (sd/mcse)²; the ends take the smaller of that and the tails'
 * @see A. Vehtari, A. Gelman, D. Simpson, B. Carpenter, P.-C. Bürkner, Bayesian Anal. 16 (2021) 667, §4
 */
export function quantileMcse(
  tail: ReportedTail,
  { sd, mcseMean, essTail }: { sd: number | null; mcseMean: number | null; essTail: number | null },
): number {
  if (sd === null || mcseMean === null) return NaN;
  if (sd === 0) return 0;
  const ofMean = (sd / mcseMean) ** 2;
  const n = tail === 0.5 || essTail === null ? ofMean : Math.min(ofMean, essTail);
  return (sd * Math.sqrt((tail * (1 - tail)) / n)) / normalDensity[tail];
}

/**
 * Why a quantity has no value yet, in words; null where it has one. A value is one only when twice its Monte Carlo error
 * is less than what it is to be told apart from, half the width of its 68 % interval.
 *
 * @param facts as the report of the draws has them
 */
export function weakness(facts: {
  sd: number | null;
  mcseMean: number | null;
  q16: number | null;
  q84: number | null;
}): string | null {
  const { sd, mcseMean, q16, q84 } = facts;
  if (q16 === null || q84 === null || sd === null) return 'too few draws are kept';
  if (mcseMean === null) return 'the replicas are too short or too far apart for a Monte Carlo error';
  if (sd > 0 && 2 * mcseMean >= (q84 - q16) / 2)
    return 'twice its Monte Carlo error is as large as half its 68\u202f% interval';
  return null;
}
