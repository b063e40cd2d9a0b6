import { paddedDomain } from '@/lib/figures/ticks';
import type { FigureSize } from './figure';
import type { Panel } from './frame';
import { placeKey, type KeyEntry } from './key';
import type { Curve, PointsFigureProps } from './points-figure';

const lineClass = {
  sum: 'sum',
  best: 'sum',
  background: 'bg',
  envelope: 'env',
  over: 'over',
} as const;

/** Class of a curve's line; a field's carries its colour and dash. */
export function classOf(curve: Curve): string {
  return curve.role === 'field' ? `ln f${(curve.field ?? 0) + 1}` : lineClass[curve.role];
}

/** Ends of the axis: the outer edges of the bins, else a little more than the points or curves reach. */
export function kappaDomain({ xDomain, points, curves = [], band }: PointsFigureProps): [number, number] {
  if (xDomain) return [xDomain[0], xDomain[1]];
  const first = points?.lo?.[0];
  const last = points?.hi?.[points.hi.length - 1];
  if (first !== undefined && last !== undefined && first > 0) return [first, last];
  const kappas = [points?.kappa ?? [], ...curves.map((c) => c.kappa), band?.kappa ?? []].flatMap((k) =>
    Array.from(k),
  );
  const positive = kappas.filter((k) => k > 0);
  if (!positive.length) return [0.001, 1];
  const [lo, hi] = [Math.min(...positive), Math.max(...positive)];
  return points ? [lo / 1.06, hi * 1.06] : [lo, hi];
}

/** Ends of the vertical axis: from the points with their errors alone, so that it stands still while curves move. */
export function valueDomain({ yDomain, points, curves = [], band }: PointsFigureProps): [number, number] {
  if (yDomain) return [yDomain[0], yDomain[1]];
  const { value = [], error = [] } = points ?? {};
  const ends = Array.from(value).flatMap((v, i) => [v - error[i], v + error[i]]);
  if (ends.some(Number.isFinite)) return paddedDomain(ends, 0.1);
  const drawn = band ? [band.lo95, band.hi95] : curves.map((c) => c.y);
  return paddedDomain(drawn.flatMap((y) => Array.from(y)));
}

/** Where things stand at a given size; the key's rows push the panels down. */
export function placePanels(keys: readonly KeyEntry[], residuals: boolean, { width, narrow }: FigureSize) {
  const left = narrow ? 36 : 44;
  const keyFrom = narrow ? left : 112;
  const { rows } = placeKey(keys, keyFrom, width - 8);
  const top = narrow ? 37 + 21 * rows : 44 + 21 * Math.max(0, rows - 1);
  const main: Panel = { left, right: width - 8, top, bottom: top + (narrow ? 186 : 252) };
  if (!residuals) return { main, keyFrom, height: roundUp(main.bottom + 52) };
  const residual: Panel = {
    ...main,
    top: main.bottom + (narrow ? 34 : 38),
    bottom: main.bottom + (narrow ? 96 : 114),
  };
  return { main, residual, keyFrom, height: roundUp(residual.bottom + 52) };
}

function roundUp(height: number): number {
  return Math.ceil(height / 7) * 7;
}

/** One entry a curve in the order given, the band last. */
export function keyEntries({ curves = [], band }: PointsFigureProps): KeyEntry[] {
  const lines = curves.map((c) => ({
    line: classOf(c),
    field: c.role === 'field' ? c.field : undefined,
    label: c.label,
  }));
  return band?.label ? [...lines, { line: 'band', label: band.label }] : lines;
}
