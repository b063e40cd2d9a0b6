/** A marginal's median and standard deviation with the Monte Carlo standard error of the median, in one unit. */
export interface MovedMarginal {
  median: number;
  sd: number;
  /** Null where it isn't known. */
  mcse: number | null;
}

/**
 * How far a median moved between two posteriors, in units of their combined standard deviation:
 * Δ = (m₂ − m₁)/√(s₁² + s₂²), with Monte Carlo standard error √(e₁² + e₂²)/√(s₁² + s₂²). It measures a distance and is no
 * significance: posteriors of two versions of one measurement share most of their data.
 *
 * @param before of the earlier posterior
 * @param after of the later one, in the same unit
 * @returns both without a unit; null where neither posterior has a width; `mcse` null where an error isn't known
 */
export function shiftOf(
  before: MovedMarginal,
  after: MovedMarginal,
): { shift: number; mcse: number | null } | null {
  const width = Math.hypot(before.sd, after.sd);
  if (!(width > 0) || !Number.isFinite(width)) return null;
  return {
    shift: (after.median - before.median) / width,
    mcse: before.mcse === null || after.mcse === null ? null : Math.hypot(before.mcse, after.mcse) / width,
  };
}
