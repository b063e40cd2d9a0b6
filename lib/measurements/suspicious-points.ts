import { median } from './mocks';
import type { Measurement } from './types';

/** Neighbours on either side from which the trend at a point is taken. */
const NEIGHBOURS = 3;
/** Standard errors beyond which a point is suspicious. */
const THRESHOLD = 5;
/** At most so many are named; each one found is left out of its neighbours' trends before the next is sought. */
const MOST = 20;

/** A point that lies far from its neighbours' trend. */
export interface SuspiciousPoint {
  /** Index in the measurement, ascending κ. */
  index: number;
  /** Distance from the trend in standard errors of point and trend together; positive. */
  standardErrors: number;
}

/**
 * Points that lie more than five standard errors from the smooth trend of their neighbours: a parabola in ln κ, weighted by
 * 1/σ², through up to three points on either side, without the point itself. Where the data as a whole do not follow such
 * parabolas (oscillations fast against the bins), the distances are measured against their own robust scatter
 * (1.4826 × median), if that is larger than one. Fewer than eight points have no trend.
 */
export function findSuspiciousPoints({ kappa, S }: Measurement, sigma: Float64Array): SuspiciousPoint[] {
  const kept = Array.from(kappa.keys()).filter((i) => Number.isFinite(S[i]) && sigma[i] > 0);
  const found: SuspiciousPoint[] = [];
  while (kept.length >= 2 * NEIGHBOURS + 2 && found.length < MOST) {
    const distances = Float64Array.from(kept, (_, at) => distanceFromTrend(kept, at, kappa, S, sigma));
    const scatter = Math.max(1, 1.4826 * median(distances));
    let worst = 0;
    for (let at = 1; at < kept.length; at += 1) if (distances[at] > distances[worst]) worst = at;
    if (!(distances[worst] > THRESHOLD * scatter)) break;
    found.push({ index: kept[worst], standardErrors: distances[worst] });
    kept.splice(worst, 1);
  }
  return found.sort((a, b) => a.index - b.index);
}

/** |S − trend| over √(σ² + variance of the trend) at the point `kept[at]`. */
function distanceFromTrend(
  kept: number[],
  at: number,
  kappa: Float64Array,
  S: Float64Array,
  sigma: Float64Array,
): number {
  const point = kept[at];
  // Sums of weighted powers of x = ln κ − ln κ of the point: the trend at the point is then the constant term.
  const moments = new Float64Array(5);
  const right = new Float64Array(3);
  const from = Math.max(0, Math.min(at - NEIGHBOURS, kept.length - 2 * NEIGHBOURS - 1));
  const to = Math.min(kept.length - 1, from + 2 * NEIGHBOURS);
  const width = Math.log(kappa[kept[to]] / kappa[kept[from]]);
  for (let j = from; j <= to; j += 1) {
    if (j === at) continue;
    const neighbour = kept[j];
    const x = Math.log(kappa[neighbour] / kappa[point]) / width;
    let weight = sigma[neighbour] ** -2;
    for (let power = 0; power < 5; power += 1) {
      moments[power] += weight;
      if (power < 3) right[power] += weight * S[neighbour];
      weight *= x;
    }
  }
  const [m0, m1, m2, m3, m4] = moments;
  // First row of the adjugate of the moment matrix; its product with the first column is the determinant.
  const a = m2 * m4 - m3 * m3;
  const b = m2 * m3 - m1 * m4;
  const c = m1 * m3 - m2 * m2;
  const determinant = m0 * a + m1 * b + m2 * c;
  const trend = (a * right[0] + b * right[1] + c * right[2]) / determinant;
  const variance = sigma[point] ** 2 + a / determinant;
  const distance = Math.abs(S[point] - trend) / Math.sqrt(variance);
  // Neighbours that coincide in κ determine no parabola, and then nothing can be said.
  return Number.isFinite(distance) ? distance : 0;
}
