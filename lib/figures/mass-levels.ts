/**
 * Levels of a density above which given shares of the mass lie (regions of highest density).
 *
 * @param density values ≥ 0: the density at each draw, every draw weighing the same, or the density in each cell of a
 *   regular grid, every cell weighing as much as its density
 * @param masses shares in (0, 1), such as [0.68, 0.95]
 * @param of what the values belong to
 * @returns one level for each share, in its order and in the unit of the density; 0 where there is no mass
 * @see R. J. Hyndman, Computing and graphing highest density regions, Am. Stat. 50 (1996) 120
 */
export function massLevels(
  density: ArrayLike<number>,
  masses: readonly number[],
  of: 'cells' | 'draws' = 'cells',
): number[] {
  const sorted = new Float64Array(density).sort();
  const n = sorted.length;
  if (of === 'draws')
    return masses.map((mass) => {
      if (n === 0) return 0;
      const outside = (1 - mass) * n;
      const i = Math.min(n - 1, Math.floor(outside));
      const previous = i > 0 ? sorted[i - 1] : 0;
      return previous + (outside - i) * (sorted[i] - previous);
    });
  const total = sorted.reduce((sum, v) => sum + v, 0);
  return masses.map((mass) => {
    let above = 0;
    for (let i = n - 1; i >= 0; i--) {
      above += sorted[i];
      if (above >= mass * total) return sorted[i];
    }
    return 0;
  });
}
