/**
 * Quantile of type 7 (linear between order statistics) of sorted values.
 *
 * @param sorted rising, finite; `p` in [0, 1]
 * @returns in the unit of the values; NaN for no values
 * @see R. J. Hyndman, Y. Fan, Sample quantiles in statistical packages, Am. Stat. 50 (1996) 361
 */
export function quantileOfSorted(sorted: ArrayLike<number>, p: number): number {
  const n = sorted.length;
  if (n === 0) return NaN;
  const h = (n - 1) * Math.min(1, Math.max(0, p));
  const below = Math.floor(h);
  const above = Math.min(n - 1, below + 1);
  return sorted[below] + (h - below) * (sorted[above] - sorted[below]);
}

/** The finite values in rising order, as a new array. */
export function sortedFinite(values: ArrayLike<number>): Float64Array {
  const copy = new Float64Array(values);
  let kept = 0;
  for (let i = 0; i < copy.length; i++) if (Number.isFinite(copy[i])) copy[kept++] = copy[i];
  return copy.slice(0, kept).sort();
}
