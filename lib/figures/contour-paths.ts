import { contours } from 'd3-contour';
import type { GridAxis } from './density';

/**
 * Outlines of the regions in which a density on a grid exceeds some levels.
 *
 * @param density `ax.cells × ay.cells` values, x running fastest
 * @param levels thresholds, in the density's unit
 * @returns for each level, in its order, closed rings of points x₀, y₀, x₁, y₁, … in the parameters' units, holes among
 *   them; a grid's edge closes what reaches it
 */
export function contourRings(
  density: Float64Array,
  ax: GridAxis,
  ay: GridAxis,
  levels: readonly number[],
): Float64Array[][] {
  const stepX = (ax.hi - ax.lo) / ax.cells;
  const stepY = (ay.hi - ay.lo) / ay.cells;
  // d3-contour wants thresholds in rising order and gives them back so.
  const rising = [...new Set(levels)].sort((a, b) => a - b);
  const regions = contours().size([ax.cells, ay.cells]).thresholds(rising)(Array.from(density));
  const byLevel = new Map(regions.map((region, i) => [rising[i], region]));
  return levels.map((level) =>
    (byLevel.get(level)?.coordinates ?? [])
      .flat()
      .map((ring) => Float64Array.from(ring.flatMap(([u, v]) => [ax.lo + u * stepX, ay.lo + v * stepY]))),
  );
}

/**
 * Path data of closed rings.
 *
 * @param rings points as `contourRings` gives them
 * @param toX pixels from the parameter's unit; `toY` likewise
 */
export function ringsPath(
  rings: readonly Float64Array[],
  toX: (value: number) => number,
  toY: (value: number) => number,
): string {
  return rings
    .map((ring) => {
      const points: string[] = [];
      for (let i = 0; i < ring.length; i += 2)
        points.push(`${toX(ring[i]).toFixed(1)} ${toY(ring[i + 1]).toFixed(1)}`);
      return `M${points.join('L')}Z`;
    })
    .join('');
}
