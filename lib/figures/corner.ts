import { contourPaths } from './contour-paths';
import { density1d, density2d, densityAtDraws, gridAxis, type GridAxis } from './density';
import { decimalsByMcse, formatNumber } from './format';
import { massLevels } from './mass-levels';
import { areaPath, linePath } from './paths';
import { quantileOfSorted, sortedFinite } from './quantiles';

/** The shares of the draws that the two contours enclose. */
export const cornerMasses = [0.68, 0.95] as const;

/** What is known of one parameter's draws, whatever panel it stands in. */
export interface Marginal {
  axis: GridAxis;
  density: Float64Array;
  median: number;
  q16: number;
  q84: number;
  draws: ArrayLike<number>;
}

/** Density, median and 68 % interval (16 to 84 % quantiles, type 7) of one parameter's draws. */
export function marginal(draws: ArrayLike<number>): Marginal {
  const sorted = sortedFinite(draws);
  const axis = gridAxis(sorted);
  return {
    axis,
    density: density1d(draws, axis),
    median: quantileOfSorted(sorted, 0.5),
    q16: quantileOfSorted(sorted, 0.16),
    q84: quantileOfSorted(sorted, 0.84),
    draws,
  };
}

/** Joint density of two parameters and the levels that enclose 68 and 95 % of their draws. */
export interface Joint {
  density: Float64Array;
  levels: number[];
  /** Indices of at most 150 draws outside the wider contour, spread evenly over all such. */
  outside: number[];
}

const mostDots = 150;

/** @see massLevels: the levels are quantiles of the smoothed density at the draws themselves. */
export function joint(x: Marginal, y: Marginal): Joint {
  const density = density2d(x.draws, y.draws, x.axis, y.axis);
  const atDraws = densityAtDraws(density, x.draws, y.draws, x.axis, y.axis);
  const levels = massLevels(atDraws, cornerMasses, 'draws');
  const outside: number[] = [];
  for (let i = 0; i < atDraws.length; i++)
    if (atDraws[i] < levels[1] && inGrid(x.draws[i], x.axis) && inGrid(y.draws[i], y.axis)) outside.push(i);
  const every = Math.max(1, outside.length / mostDots);
  const kept = Array.from(
    { length: Math.min(mostDots, outside.length) },
    (_, i) => outside[Math.floor(i * every)],
  );
  return { density, levels, outside: kept };
}

function inGrid(value: number, axis: GridAxis): boolean {
  return value >= axis.lo && value <= axis.hi;
}

/** A square panel's place in pixels. */
export interface PanelPlace {
  left: number;
  top: number;
  size: number;
}

/** From a parameter's unit to pixels along x (rising to the right) and y (rising upwards). */
export function panelScales(x: GridAxis, y: GridAxis, place: PanelPlace) {
  return {
    toX: (v: number) => place.left + (place.size * (v - x.lo)) / (x.hi - x.lo),
    toY: (v: number) => place.top + place.size - (place.size * (v - y.lo)) / (y.hi - y.lo),
  };
}

/** Paths of an off-diagonal panel: both regions and the single draws outside. */
export function jointPaths(x: Marginal, y: Marginal, both: Joint, place: PanelPlace) {
  const { toX, toY } = panelScales(x.axis, y.axis, place);
  const [inner, outer] = contourPaths(both.density, x.axis, y.axis, both.levels, toX, toY);
  const dots = both.outside
    .map((i) => `M${toX(x.draws[i]).toFixed(1)} ${toY(y.draws[i]).toFixed(1)}h.01`)
    .join('');
  return { inner, outer, dots };
}

/** Paths of a diagonal panel: density, the area of the 68 % interval below it and the median. */
export function marginalPaths(m: Marginal, place: PanelPlace) {
  const { axis, density } = m;
  const highest = density.reduce((top, v) => Math.max(top, v), 0) || 1;
  const base = place.top + place.size;
  const head = 0.92 * place.size;
  const step = (axis.hi - axis.lo) / axis.cells;
  const toX = (v: number) => place.left + (place.size * (v - axis.lo)) / (axis.hi - axis.lo);
  const centre = (i: number) => axis.lo + (i + 0.5) * step;
  const heightAt = (v: number) => {
    const u = Math.min(axis.cells - 1, Math.max(0, (v - axis.lo) / step - 0.5));
    const i = Math.min(axis.cells - 2, Math.floor(u));
    return base - (head * (density[i] + (u - i) * (density[i + 1] - density[i]))) / highest;
  };
  const all = Array.from(density, (_, i) => centre(i));
  const shaded = [m.q16, ...all.filter((v) => v > m.q16 && v < m.q84), m.q84];
  return {
    line: linePath(all.map(toX), all.map(heightAt)),
    area: areaPath(
      shaded.map(toX),
      shaded.map(heightAt),
      shaded.map(() => base),
    ),
    median: `M${toX(m.median).toFixed(1)} ${base.toFixed(1)}V${heightAt(m.median).toFixed(1)}`,
  };
}

/**
 * Median and the distances to the ends of the 68 % interval as text.
 *
 * @param mcse Monte Carlo standard error of the median in the parameter's unit; left out, the interval's half-width is
 *   shown with two figures
 */
export function marginalText(m: Marginal, mcse?: number): { median: string; up: string; down: string } {
  const half = (m.q84 - m.q16) / 2;
  const byWidth = half > 0 ? Math.max(0, 1 - Math.floor(Math.log10(half))) : 2;
  const decimals =
    mcse !== undefined && mcse > 0 ? Math.min(byWidth, decimalsByMcse(mcse)) : Math.min(6, byWidth);
  return {
    median: formatNumber(m.median, decimals),
    up: `+${formatNumber(m.q84 - m.median, decimals)}`,
    down: formatNumber(m.q16 - m.median, decimals),
  };
}
