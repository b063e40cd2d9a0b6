import type { ExcludedBin } from './cuts';
import type { Measurement } from './types';

/** Two bins are one if their edges agree to this relative tolerance, that of the cuts. */
const TOLERANCE = 1e-9;

type Bins = Pick<Measurement, 'kappa' | 'kappaLo' | 'kappaHi'>;

/** An exclusion with the place of its bin. */
export type PlacedBin = ExcludedBin & { kappa: [number, number] };

export interface CarriedBins {
  /** Ascending in κ. */
  excluded: PlacedBin[];
  /** Those whose bin is not there. */
  dropped: ExcludedBin[];
}

/** Edges of bin i (from 0), or its κ twice where there are none. */
function placeOf({ kappa, kappaLo, kappaHi }: Bins, i: number): [number, number] {
  return [(kappaLo ?? kappa)[i], (kappaHi ?? kappa)[i]];
}

const isPlace = ([lo, hi]: [number, number], [low, high]: [number, number]): boolean =>
  Math.abs(lo - low) <= TOLERANCE * low && Math.abs(hi - high) <= TOLERANCE * high;

/**
 * Exclusions on the bins of a measurement. One that names its edges is found by them, relative tolerance 10⁻⁹, whatever
 * number the bin has there: where several bins have those edges (triangles of one κ), the one with its own number, else the first that
 * isn't excluded yet. One without edges is taken by its number. What isn't there, or is excluded twice, is dropped; nothing throws.
 *
 * @param measurement bins, ascending in κ
 */
export function carryExcluded(measurement: Bins, excluded: readonly ExcludedBin[]): CarriedBins {
  const rows = measurement.kappa.length;
  const taken = new Map<number, PlacedBin>();
  const dropped: ExcludedBin[] = [];
  for (const one of excluded) {
    const { bin, reason, kappa } = one;
    const matches = Array.from({ length: rows }, (_, i) => i).filter(
      (i) => !taken.has(i) && (kappa ? isPlace(placeOf(measurement, i), kappa) : i === bin - 1),
    );
    const index = matches.find((i) => i === bin - 1) ?? matches[0];
    if (index === undefined) dropped.push(one);
    else taken.set(index, { bin: index + 1, reason, kappa: placeOf(measurement, index) });
  }
  return { excluded: [...taken.values()].sort((a, b) => a.bin - b.bin), dropped };
}
