import { contourRings, ringsPath } from './contour-paths';
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
  };
}

/** What is known of two parameters' draws together. */
export interface Joint {
  /** Levels of the smoothed density that enclose 68 and 95 % of the draws, in draws a cell. */
  levels: number[];
  /** Outline of the region above each level, in the parameters' units. */
  regions: Float64Array[][];
  /** Share of the draws on or above each level, counted. */
  enclosed: number[];
  /** At most 150 draws outside the wider region, spread evenly over all such: x₀, y₀, x₁, y₁, … */
  outside: Float64Array;
}

const mostDots = 150;

/**
 * Smoothed joint density of two parameters' draws, as the regions that enclose 68 and 95 % of them.
 *
 * @param x draws; `y` draws of the same length
 * @param ax grid of x; `ay` of y
 * @see massLevels: the levels are quantiles of the smoothed density at the draws themselves.
 */
export function joint(x: ArrayLike<number>, y: ArrayLike<number>, ax: GridAxis, ay: GridAxis): Joint {
  const density = density2d(x, y, ax, ay);
  const atDraws = densityAtDraws(density, x, y, ax, ay);
  const levels = massLevels(atDraws, cornerMasses, 'draws');
  const [inner, outer] = levels;
  let [aboveInner, aboveOuter] = [0, 0];
  const outside: number[] = [];
  for (let i = 0; i < atDraws.length; i++) {
    if (atDraws[i] >= inner) aboveInner++;
    if (atDraws[i] >= outer) aboveOuter++;
    else if (inGrid(x[i], ax) && inGrid(y[i], ay)) outside.push(i);
  }
  const count = Math.min(mostDots, outside.length);
  const dots = new Float64Array(2 * count);
  for (let k = 0; k < count; k++) {
    const i = outside[Math.floor((k * outside.length) / count)];
    dots[2 * k] = x[i];
    dots[2 * k + 1] = y[i];
  }
  return {
    levels,
    regions: contourRings(density, ax, ay, levels),
    enclosed: [aboveInner, aboveOuter].map((n) => n / Math.max(1, atDraws.length)),
    outside: dots,
  };
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
export function jointPaths(x: GridAxis, y: GridAxis, both: Joint, place: PanelPlace) {
  const { toX, toY } = panelScales(x, y, place);
  const [inner, outer] = both.regions.map((rings) => ringsPath(rings, toX, toY));
  let dots = '';
  for (let i = 0; i < both.outside.length; i += 2)
    dots += `M${toX(both.outside[i]).toFixed(1)} ${toY(both.outside[i + 1]).toFixed(1)}h.01`;
  return { inner, outer, dots };
}

/** Highest value of a density, or 1 where it is nothing. */
export const highestOf = ({ density }: Marginal): number =>
  density.reduce((top, v) => Math.max(top, v), 0) || 1;

/**
 * Paths of a diagonal panel: density, the area of the 68 % interval below it and the median.
 *
 * @param on axis of the panel, where it isn't that of the marginal itself
 * @param highest density that reaches the panel's head, in 1/unit of the parameter
 */
export function marginalPaths(
  m: Marginal,
  place: PanelPlace,
  on: GridAxis = m.axis,
  highest: number = highestOf(m),
) {
  const { axis, density } = m;
  const base = place.top + place.size;
  const head = 0.92 * place.size;
  const step = (axis.hi - axis.lo) / axis.cells;
  const { toX } = panelScales(on, on, place);
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
