import { forwardSolve, choleskyInto } from '@/lib/inference/cholesky';
import type { Measurement, MeasurementTheory, Notebook } from '@/lib/schemas';
import type { Axis } from '@/lib/templates';

/** The bins that a notebook keeps of its measurement, as the browser needs them. */
export interface KeptPoints {
  /** Their rows in the measurement. */
  rows: number[];
  kappa: Float64Array;
  lo: Float64Array | null;
  hi: Float64Array | null;
  /** NaN while blind. */
  S: Float64Array;
  sigma: Float64Array;
  /** Lower Cholesky factor of the covariance, row-major; null where it isn't given to the browser. */
  factor: Float64Array | null;
  /** How theory becomes these values, where files of the measurement say so. */
  theory: KeptTheory | null;
  /** Those of further measurements that are predicted together with these; absent where there are none. */
  together?: Together;
}

/** Measurements that are predicted together. */
export interface Together {
  /** What they are called, the first one's name first. */
  labels: string[];
  further: KeptPoints[];
}

/** Window and columns of the kept bins. */
export interface KeptTheory {
  /** Bins or points of the theory, and the matrix (row-major); null without a window, or where it is too large for the browser. */
  window: {
    kappa: Float64Array;
    lo: Float64Array | null;
    hi: Float64Array | null;
    matrix: Float64Array;
  } | null;
  columns: { name: string; values: Float64Array }[];
}

/** Relative tolerance at both ends of a cut, as on the server. */
const tolerance = 1e-9;

/** Rows inside a range of κ with their edges, or with κ where there are none. */
function rowsInRange(
  points: Measurement['points'],
  cuts: Pick<Notebook['cuts'], 'kappaMin' | 'kappaMax'>,
): number[] {
  const low = (cuts.kappaMin ?? 0) * (1 - tolerance);
  const high = (cuts.kappaMax ?? Infinity) * (1 + tolerance);
  const [lower, upper] = [points.kappaLo ?? points.kappa, points.kappaHi ?? points.kappa];
  return points.kappa.flatMap((_, i) => (lower[i] >= low && upper[i] <= high ? [i] : []));
}

function factorOf(
  covariance: readonly (readonly number[])[],
  added: readonly (readonly number[])[] | null,
  rows: readonly number[],
): Float64Array | null {
  const p = rows.length;
  const cut = Float64Array.from({ length: p * p }, (_, k) => {
    const [i, j] = [rows[Math.floor(k / p)], rows[k % p]];
    return covariance[i][j] + (added ? added[i][j] : 0);
  });
  const factor = new Float64Array(p * p);
  return choleskyInto(cut, p, factor) < 0 ? factor : null;
}

/** Rows that the cuts keep: inside the range, and not left out one by one. */
export function keptRows(points: Measurement['points'], cuts: Notebook['cuts']): number[] {
  const out = new Set((cuts.excluded ?? []).map(({ bin }) => bin - 1));
  return rowsInRange(points, cuts).filter((row) => !out.has(row));
}

/** Of the bins left out one by one those inside the range, where they would be kept else. */
export function leftOut(
  points: Measurement['points'],
  cuts: Notebook['cuts'],
): NonNullable<Notebook['cuts']['excluded']> {
  const inside = new Set(rowsInRange(points, cuts));
  return (cuts.excluded ?? []).filter(({ bin }) => inside.has(bin - 1));
}

export function keepPoints(measurement: Measurement, cuts: Notebook['cuts']): KeptPoints {
  const { points, covariance, theory } = measurement;
  const rows = keptRows(points, cuts);
  const take = (values: readonly (number | null)[]) => Float64Array.from(rows, (i) => values[i] ?? NaN);
  return {
    rows,
    kappa: take(points.kappa),
    lo: points.kappaLo && take(points.kappaLo),
    hi: points.kappaHi && take(points.kappaHi),
    S: take(points.S),
    sigma: take(points.sigma),
    factor: covariance && rows.length ? factorOf(covariance, theory?.covariance ?? null, rows) : null,
    theory: theory && keepTheory(theory, rows),
  };
}

/** The kept bins of a notebook's measurement with those of the further ones, whose names are told apart where they are alike. */
export function keepTogether(
  measurement: Measurement,
  cuts: Notebook['cuts'],
  further: readonly { measurement: Measurement; cuts: Notebook['cuts'] }[],
): KeptPoints {
  const points = keepPoints(measurement, cuts);
  if (further.length === 0) return points;
  return {
    ...points,
    together: {
      labels: measurementLabels([measurement, ...further.map((each) => each.measurement)]),
      further: further.map((each) => keepPoints(each.measurement, each.cuts)),
    },
  };
}

/** Names of measurements, with their numbers where two have the same one. */
export function measurementLabels(measurements: readonly { name: string }[]): string[] {
  const names = measurements.map(({ name }) => name);
  return names.map((name, k) =>
    names.indexOf(name) === names.lastIndexOf(name) ? name : `${name} (${k + 1})`,
  );
}

function keepTheory({ window, columns }: MeasurementTheory, rows: readonly number[]): KeptTheory {
  const floats = (values: readonly number[] | null) => values && Float64Array.from(values);
  const matrix = window?.matrix ?? null;
  return {
    window:
      window && matrix
        ? {
            kappa: Float64Array.from(window.kappa),
            lo: floats(window.kappaLo),
            hi: floats(window.kappaHi),
            matrix: Float64Array.from(rows.flatMap((row) => matrix[row])),
          }
        : null,
    columns: columns.map(({ name, values }) => ({
      name,
      values: Float64Array.from(rows, (row) => values[row]),
    })),
  };
}

/** Where a template is evaluated on these points: over the bins where there are edges, unless averaging is off. */
export function dataAxis(
  points: Pick<KeptPoints, 'lo' | 'hi' | 'kappa'>,
  options: Record<string, unknown>,
): Axis {
  const { lo, hi, kappa } = points;
  if (!lo || !hi || options.binAverage === false) return { kind: 'points', kappa };
  return { kind: 'bins', lo, hi, weightPower: Number(options.binWeight ?? 0) };
}

/** The points of all measurements one after the other; the covariance between two of them isn't known to the browser. */
export function joinPoints(points: KeptPoints): KeptPoints {
  if (!points.together) return points;
  const all = [points, ...points.together.further];
  const joined = (take: (each: KeptPoints) => Float64Array) =>
    Float64Array.from(all.flatMap((each) => Array.from(take(each))));
  const S = joined((each) => each.S);
  const p = S.length;
  const factor = all.every((each) => each.factor) ? new Float64Array(p * p) : null;
  let from = 0;
  for (const each of all) {
    const n = each.S.length;
    for (let i = 0; i < n && factor && each.factor; i += 1) {
      factor.set(each.factor.subarray(i * n, i * n + i + 1), (from + i) * p + from);
    }
    from += n;
  }
  return {
    rows: all.flatMap(({ rows }) => rows),
    kappa: joined((each) => each.kappa),
    lo: null,
    hi: null,
    S,
    sigma: joined((each) => each.sigma),
    factor,
    theory: null,
  };
}

/** χ² of a prediction with the covariance; with the errors alone where there is no covariance here. */
export function chiSquare(points: KeptPoints, prediction: ArrayLike<number>): number {
  const p = points.S.length;
  const residual = Float64Array.from({ length: p }, (_, i) => points.S[i] - prediction[i]);
  if (points.factor) forwardSolve(points.factor, p, residual);
  else residual.forEach((value, i) => (residual[i] = value / points.sigma[i]));
  return residual.reduce((sum, value) => sum + value * value, 0);
}

/** Residuals in standard deviations of each bin. */
export function residuals(points: KeptPoints, prediction: ArrayLike<number>): Float64Array {
  return points.S.map((value, i) => (value - prediction[i]) / points.sigma[i]);
}
