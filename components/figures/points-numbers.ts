import type { FigureNumbers } from '@/lib/figures/csv';
import type { PointsFigureProps } from './points-figure';

/** Value of a curve at κ, linear between its points in ln κ; null outside. */
function at(kappa: ArrayLike<number>, y: ArrayLike<number>, where: number): number | null {
  for (let i = 1; i < kappa.length; i++)
    if (kappa[i - 1] <= where && where <= kappa[i]) {
      const share = Math.log(where / kappa[i - 1]) / Math.log(kappa[i] / kappa[i - 1]);
      return y[i - 1] + (share || 0) * (y[i] - y[i - 1]);
    }
  return null;
}

/** The numbers behind the figure: a row a point, with each curve and band there; without points, a row of the curves' own κ. */
export function pointsNumbers({ points, curves = [], band, residuals }: PointsFigureProps): FigureNumbers {
  const kappa = points?.kappa ?? curves[0]?.kappa ?? band?.kappa ?? [];
  const edges = points?.lo && points.hi ? { lo: points.lo, hi: points.hi } : undefined;
  const lines = curves.flatMap((curve) => [
    { name: curve.label, kappa: curve.kappa, y: curve.y },
    ...(curve.yLow ? [{ name: `${curve.label}, lower`, kappa: curve.kappa, y: curve.yLow }] : []),
  ]);
  const bands = band
    ? (['lo95', 'lo68', 'hi68', 'hi95'] as const).map((key) => ({
        name: key,
        kappa: band.kappa,
        y: band[key],
      }))
    : [];
  const all = [...lines, ...bands];
  const hollow = points?.hollow?.length ? new Set(points.hollow.map(({ index }) => index)) : null;
  return {
    columns: [
      ...(edges ? ['kappa_lo', 'kappa_hi'] : []),
      'kappa',
      ...(points ? ['S', 'standard_error'] : []),
      ...(hollow ? ['left_out'] : []),
      ...(residuals ? ['residual_sd'] : []),
      ...all.map((line) => line.name),
    ],
    rows: Array.from(kappa, (k, i) => [
      ...(edges ? [edges.lo[i], edges.hi[i]] : []),
      k,
      ...(points ? [points.value[i], points.error[i]] : []),
      ...(hollow ? [hollow.has(i) ? 1 : 0] : []),
      ...(residuals ? [residuals[i]] : []),
      ...all.map((line) => at(line.kappa, line.y, k)),
    ]),
  };
}
