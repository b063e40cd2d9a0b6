/** What one version of a measurement holds, ascending in κ. */
export interface VersionPoints {
  kappa: ArrayLike<number>;
  /** NaN where a value is withheld. */
  S: ArrayLike<number>;
  /** Standard errors, in the unit of S. */
  sigma: ArrayLike<number>;
}

/** A bin that both versions have and whose value or error differs. */
export interface MovedPoint {
  kappa: number;
  before: number;
  after: number;
  /** (after − before)/σ of the later version, without a unit; NaN where values are withheld. */
  inSigma: number;
  /** Ratio of the later standard error to the earlier one. */
  errorRatio: number;
}

export interface VersionDifference {
  /** Bins in both versions. */
  shared: number;
  /** Bins of the later version alone, of the earlier version alone. */
  added: number;
  removed: number;
  /** Shared bins that differ, ascending in κ. */
  moved: MovedPoint[];
}

/** Two bins are one if their κ agree to this relative tolerance, that of the cuts. */
const tolerance = 1e-9;

const differs = (a: number, b: number): boolean =>
  a !== b &&
  !(Number.isNaN(a) && Number.isNaN(b)) &&
  Math.abs(a - b) > 1e-12 * Math.max(Math.abs(a), Math.abs(b));

/**
 * What a later version of a measurement changed: bins are matched by κ (relative tolerance 10⁻⁹) in one pass over both.
 * Differences of S are given in units of the later standard error. Rounding alone (relative 10⁻¹²) is no difference.
 *
 * @param before the earlier version, `after` the later; both ascending in κ > 0
 */
export function differenceOf(before: VersionPoints, after: VersionPoints): VersionDifference {
  const moved: MovedPoint[] = [];
  let shared = 0;
  let i = 0;
  let j = 0;
  while (i < before.kappa.length && j < after.kappa.length) {
    const [a, b] = [before.kappa[i], after.kappa[j]];
    if (Math.abs(a - b) <= tolerance * Math.max(a, b)) {
      shared += 1;
      if (differs(before.S[i], after.S[j]) || differs(before.sigma[i], after.sigma[j])) {
        moved.push({
          kappa: b,
          before: before.S[i],
          after: after.S[j],
          inSigma: (after.S[j] - before.S[i]) / after.sigma[j],
          errorRatio: after.sigma[j] / before.sigma[i],
        });
      }
      i += 1;
      j += 1;
    } else if (a < b) i += 1;
    else j += 1;
  }
  return { shared, added: after.kappa.length - shared, removed: before.kappa.length - shared, moved };
}
