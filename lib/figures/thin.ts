/**
 * Thins a long trace for drawing, keeping the lowest and the highest value of each stretch, so that excursions stay.
 *
 * @param values one value a draw
 * @param points most points wanted, ≥ 2
 * @returns indices in rising order; all of them where there are no more than `points`
 */
export function thinnedIndices(values: ArrayLike<number>, points: number): number[] {
  const n = values.length;
  if (n <= points) return Array.from({ length: n }, (_, i) => i);
  const stretches = Math.floor(points / 2);
  const out: number[] = [];
  for (let s = 0; s < stretches; s++) {
    const from = Math.floor((s * n) / stretches);
    const to = Math.floor(((s + 1) * n) / stretches);
    let low = from;
    let high = from;
    for (let i = from; i < to; i++) {
      if (values[i] < values[low]) low = i;
      if (values[i] > values[high]) high = i;
    }
    out.push(Math.min(low, high));
    if (low !== high) out.push(Math.max(low, high));
  }
  return out;
}
