import { contours } from 'd3-contour';
import type { GridAxis } from './density';

/**
 * Path data of the regions in which a density on a grid exceeds some levels.
 *
 * @param density `ax.cells × ay.cells` values, x running fastest
 * @param levels thresholds, in the density's unit
 * @param toX pixels from the parameter's unit; `toY` likewise
 * @returns closed paths, one for each level in its order; a grid's edge closes what reaches it
 */
export function contourPaths(
  density: Float64Array,
  ax: GridAxis,
  ay: GridAxis,
  levels: readonly number[],
  toX: (value: number) => number,
  toY: (value: number) => number,
): string[] {
  const stepX = (ax.hi - ax.lo) / ax.cells;
  const stepY = (ay.hi - ay.lo) / ay.cells;
  // d3-contour wants thresholds in rising order and gives them back so.
  const rising = [...new Set(levels)].sort((a, b) => a - b);
  const regions = contours().size([ax.cells, ay.cells]).thresholds(rising)(Array.from(density));
  const byLevel = new Map(regions.map((region, i) => [rising[i], region]));
  return levels.map((level) => {
    const region = byLevel.get(level);
    if (!region) return '';
    return region.coordinates
      .flatMap((polygon) => polygon)
      .map((ring) => {
        const points = ring.map(
          ([u, v]) => `${toX(ax.lo + u * stepX).toFixed(1)} ${toY(ay.lo + v * stepY).toFixed(1)}`,
        );
        return `M${points.join('L')}Z`;
      })
      .join('');
  });
}
