import { permuteMatrix } from './covariance';
import { MeasurementError } from './errors';
import type { Measurement } from './types';

/** Relative tolerance at both ends of a cut. */
const TOLERANCE = 1e-9;

/** A single bin that is left out, and why. */
export interface ExcludedBin {
  /** Its number in ascending κ, from 1. */
  bin: number;
  reason: string;
  /** Its edges, or its κ twice where there are none: what it is known by in another version. */
  kappa?: [number, number];
}

/** The range of κ to keep, where an end that is left out does not cut, and the single bins in it that are left out. */
export interface Cuts {
  kappaMin?: number | null;
  kappaMax?: number | null;
  excluded?: readonly Pick<ExcludedBin, 'bin'>[];
}

/** A measurement after cuts. */
export interface CutMeasurement {
  /** Kept rows, as indices into the measurement before cuts. */
  indices: Int32Array;
  measurement: Measurement;
  /** Rows and columns of the kept bins, row-major; to be inverted after the cut, never before. */
  covariance: Float64Array;
}

/**
 * Indices of the bins that lie inside [kappaMin, kappaMax] with their edges, or with κ where there are none, and are not
 * excluded, ascending; relative tolerance 1e-9 at both ends. Throws `cut-empty` if nothing is left.
 */
export function keptBins(
  { kappa, kappaLo, kappaHi }: Pick<Measurement, 'kappa' | 'kappaLo' | 'kappaHi'>,
  cuts: Cuts = {},
): number[] {
  const low = (cuts.kappaMin ?? 0) * (1 - TOLERANCE);
  const high = (cuts.kappaMax ?? Infinity) * (1 + TOLERANCE);
  const out = new Set((cuts.excluded ?? []).map(({ bin }) => bin - 1));
  const kept = Array.from(kappa.keys()).filter(
    (i) => (kappaLo ?? kappa)[i] >= low && (kappaHi ?? kappa)[i] <= high && !out.has(i),
  );
  if (kept.length === 0) throw new MeasurementError('cut-empty', 'No bin lies inside the cut.');
  return kept;
}

/**
 * Keeps what `keptBins` says. `covariance` is p × p, row-major, in ascending κ. Throws `cut-empty` if nothing is left.
 */
export function applyCuts(
  measurement: Measurement,
  covariance: Float64Array,
  cuts: Cuts = {},
): CutMeasurement {
  const { kappa, kappaLo, kappaHi, S, sigma, order } = measurement;
  const kept = keptBins(measurement, cuts);
  const take = (values: Float64Array) => Float64Array.from(kept, (i) => values[i]);
  return {
    indices: Int32Array.from(kept),
    measurement: {
      kappa: take(kappa),
      kappaLo: kappaLo && take(kappaLo),
      kappaHi: kappaHi && take(kappaHi),
      S: take(S),
      sigma: sigma && take(sigma),
      order: Int32Array.from(kept, (i) => order[i]),
    },
    covariance: permuteMatrix(covariance, kappa.length, kept),
  };
}
