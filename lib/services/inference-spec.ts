import type { MeasurementVersion, NotebookSettings } from '@/models';
import { AppError } from '@/lib/errors';
import { assemble, assembleData, type FitData, type InferenceSpec, type PartModel } from '@/lib/inference';
import { applyCuts, keptBins, type Measurement, type TheoryParts } from '@/lib/measurements';
import { likelihoodSchema, priorsSchema } from '@/lib/schemas';
import { findTemplate, type Axis } from '@/lib/templates';
import { refusingFaults } from './inference-faults';
import { cutTheory, readTheory } from './stored-theory';

/** The numbers of a measurement's version: `rows` values each, ascending in κ; covariance rows × rows, row-major. */
export interface Points {
  kappa: Float64Array;
  /** Both null where the measurement has no bin edges. */
  kappaLo: Float64Array | null;
  kappaHi: Float64Array | null;
  S: Float64Array;
  covariance: Float64Array;
  /** Window, columns and theory covariance; empty where none came with the measurement. */
  theory: TheoryParts;
}

type StoredColumns = Pick<MeasurementVersion, 'rows' | 'hasBinEdges'> & { points: Uint8Array };
type StoredPoints = StoredColumns & {
  covariance: Uint8Array;
  /** As `writeTheory` wrote it; null where nothing came with the measurement. */
  theory: Uint8Array | null;
};
/** The numbers of a version, and of those that are fitted with it. */
export type StoredNumbers = StoredPoints &
  Pick<MeasurementVersion, 'mockCount'> & {
    also?: readonly StoredNumbers[];
    /** One row a mock in ascending κ, where they are shared; `unread` where nothing but parameters is asked for. */
    mocks?: Float64Array | 'unread';
  };

/** Little-endian float64 of a stored column; byte by byte, because a buffer may start anywhere in memory. */
export function readDoubles(bytes: Uint8Array, name: string, length: number): Float64Array {
  if (bytes.byteLength !== 8 * length) {
    throw new Error(`The stored ${name} has ${bytes.byteLength} bytes where ${8 * length} are due.`);
  }
  const view = new DataView(bytes.buffer, bytes.byteOffset, bytes.byteLength);
  return Float64Array.from({ length }, (_, i) => view.getFloat64(8 * i, true));
}

/** The same numbers as they are stored. */
export function writeDoubles(...columns: Float64Array[]): Buffer {
  const bytes = Buffer.alloc(8 * columns.reduce((sum, column) => sum + column.length, 0));
  let at = 0;
  for (const column of columns) {
    for (const value of column) at = bytes.writeDoubleLE(value, at);
  }
  return bytes;
}

/** The stored columns of a version without its covariance, which is the square of the rest. */
export function readColumns(version: StoredColumns): Omit<Points, 'covariance' | 'theory'> {
  const { rows, hasBinEdges } = version;
  const all = readDoubles(version.points, 'points', 4 * rows);
  const column = (index: number): Float64Array => all.slice(index * rows, (index + 1) * rows);
  return {
    kappa: column(0),
    kappaLo: hasBinEdges ? column(1) : null,
    kappaHi: hasBinEdges ? column(2) : null,
    S: column(3),
  };
}

/** Copies the stored numbers of a version into arrays. Throws where their lengths don't agree with its rows. */
export function readPoints(version: StoredPoints): Points {
  const { rows } = version;
  return {
    ...readColumns(version),
    covariance: readDoubles(version.covariance, 'covariance', rows * rows),
    theory: readTheory(version.theory, rows),
  };
}

/** How many bins a notebook's cuts keep; needs no covariance. `invalid` at `cuts` where they keep none. */
export function countKept(version: StoredColumns, cuts: NotebookSettings['cuts']): number {
  return refusingFaults(() => keptBins(readColumns(version), cuts)).length;
}

/** What is kept of a measurement after a notebook's cuts. */
export interface CutPoints extends Points {
  /** Indices of the kept rows, ascending. */
  kept: number[];
}

/** The points that a notebook's cuts keep. `invalid` at `cuts` where they keep none. */
export function cutPoints(version: StoredPoints, cuts: NotebookSettings['cuts']): CutPoints {
  const points = readPoints(version);
  const measurement: Measurement = {
    kappa: points.kappa,
    kappaLo: points.kappaLo,
    kappaHi: points.kappaHi,
    S: points.S,
    sigma: null,
    order: Int32Array.from(points.kappa.keys()),
  };
  const cut = refusingFaults(() => applyCuts(measurement, points.covariance, cuts));
  const { kappa, kappaLo, kappaHi, S } = cut.measurement;
  const kept = [...cut.indices];
  const theory = cutTheory(points.theory, version.rows, kept);
  return { kappa, kappaLo, kappaHi, S, covariance: cut.covariance, theory, kept };
}

/**
 * Where a template is evaluated on these points: averaged over the bins where there are edges, unless `binAverage` is
 * false; at κ else. `options` must be settled.
 */
export function axisOf(
  points: Pick<Points, 'kappa' | 'kappaLo' | 'kappaHi'>,
  options: Record<string, unknown>,
): Axis {
  const { kappa, kappaLo, kappaHi } = points;
  if (kappaLo === null || kappaHi === null || options.binAverage === false) return { kind: 'points', kappa };
  return { kind: 'bins', lo: kappaLo, hi: kappaHi, weightPower: Number(options.binWeight ?? 0) };
}

/**
 * How a template becomes the values of these points: through the window where there is one, whose own bins or points then are where the
 * theory is evaluated, and with the columns beside it.
 */
export function partModel(
  points: CutPoints,
  options: Record<string, unknown>,
  label = 'measurement',
): PartModel {
  const { window, columns } = points.theory;
  const axis = window
    ? axisOf({ kappa: window.kappa, kappaLo: window.lo, kappaHi: window.hi }, options)
    : axisOf(points, options);
  return {
    label,
    length: points.S.length,
    axis,
    ...(window ? { window: window.matrix } : {}),
    ...(columns.length > 0 ? { columns } : {}),
  };
}

/** One of the measurements that are fitted together, after its cuts. */
export interface CutPart {
  points: CutPoints;
  mockCount: number | null;
  /** Rows of the measurement before its cuts. */
  rows: number;
  /** Its mocks at the kept values, a row each, where they are of the same simulated skies as those of the others. */
  mocks: Float64Array | null;
}

export interface NotebookInference {
  spec: InferenceSpec;
  /** Indices of the rows that the cuts keep, ascending; of several measurements those of their rows one after the other. */
  kept: number[];
  /** Where the data of the first measurement are; a window's theory may be elsewhere. */
  axis: Axis;
  /** Those of all measurements. */
  axes: Axis[];
}

type Chosen = Pick<NotebookSettings, 'cuts' | 'also' | 'sharedMocks'>;

/** The columns of mocks that belong to kept values. */
function cutMocks(mocks: Float64Array, rows: number, kept: readonly number[]): Float64Array {
  const count = mocks.length / rows;
  const out = new Float64Array(count * kept.length);
  for (let n = 0; n < count; n += 1) {
    kept.forEach((row, i) => (out[n * kept.length + i] = mocks[n * rows + row]));
  }
  return out;
}

/** The measurements that settings name, each with its cuts. `invalid` at `cuts` where nothing is kept of one. */
export function cutParts(numbers: StoredNumbers, { cuts, also = [], sharedMocks }: Chosen): CutPart[] {
  const further = numbers.also ?? [];
  if (further.length !== also.length) {
    throw new Error(`${further.length} further measurements were read where ${also.length} are due.`);
  }
  return [numbers, ...further].map((each, k): CutPart => {
    const points = inPlace(k, () => cutPoints(each, k === 0 ? cuts : also[k - 1].cuts));
    const shared = sharedMocks === true && each.mocks !== 'unread';
    if (shared && !each.mocks) throw new Error('The mocks that are shared weren’t read.');
    return {
      points,
      mockCount: each.mockCount,
      rows: each.rows,
      mocks: shared && each.mocks ? cutMocks(each.mocks as Float64Array, each.rows, points.kept) : null,
    };
  });
}

/** Faults in the cuts of a further measurement have their place among those. */
function inPlace<T>(k: number, run: () => T): T {
  try {
    return run();
  } catch (error) {
    if (k === 0 || !(error instanceof AppError)) throw error;
    const details = error.details.map((detail) =>
      detail.path?.startsWith('cuts')
        ? { ...detail, path: `alsoMeasurements.${k - 1}.${detail.path}` }
        : detail,
    );
    throw new AppError(error.code, error.message, details);
  }
}

/** What measurements are called in labels of parameters where nobody names them. */
export const partLabel = (k: number): string => `measurement ${k + 1}`;

/** What settings say is to be inferred from what their cuts have kept; see `inferenceSpec`. */
export function specOnParts(
  parts: readonly CutPart[],
  settings: Pick<NotebookSettings, 'likelihood' | 'template' | 'priors'>,
): NotebookInference {
  const { id, options } = settings.template;
  const mocks = parts.flatMap((part) => part.mocks ?? []);
  return refusingFaults(() => {
    const settled = findTemplate(id).normaliseOptions(options);
    const spec = assemble({
      parts: parts.map(({ points, mockCount }, k) => ({
        ...partModel(points, settled, partLabel(k)),
        data: { S: points.S, covariance: points.covariance, mockCount },
        ...(points.theory.covariance ? { theoryCovariance: points.theory.covariance } : {}),
      })),
      ...(mocks.length > 0 ? { sharedMocks: mocks } : {}),
      template: { id, options },
      likelihood: likelihoodSchema.parse(settings.likelihood).kind,
      priors: priorsSchema.parse(settings.priors),
    });
    const axes = parts.map(({ points }) => axisOf(points, settled));
    let before = 0;
    const kept = parts.flatMap(({ points, rows }) => {
      const first = before;
      before += rows;
      return points.kept.map((row) => first + row);
    });
    return { spec, kept, axis: axes[0], axes };
  });
}

/**
 * What a notebook's settings say is to be inferred from versions of its measurements. Pure apart from reading the rows.
 * A fault in cuts, template or options is `invalid` with its place; priors are checked where the posterior is built.
 */
export function inferenceSpec(numbers: StoredNumbers, settings: NotebookSettings): NotebookInference {
  return specOnParts(cutParts(numbers, settings), settings);
}

/** Data of all values of the measurements before any cut, with the covariance by which they scatter about a prediction. */
export function uncutData(
  numbers: StoredNumbers,
  settings: Pick<NotebookSettings, 'also' | 'sharedMocks'>,
): FitData {
  const everything = { cuts: {}, also: settings.also?.map((part) => ({ ...part, cuts: {} })) };
  const parts = cutParts(numbers, { ...everything, sharedMocks: settings.sharedMocks });
  const mocks = parts.flatMap((part) => part.mocks ?? []);
  return assembleData(
    parts.map(({ points: { S, covariance, theory }, mockCount }) => ({
      data: { S, covariance, mockCount },
      ...(theory.covariance ? { theoryCovariance: theory.covariance } : {}),
    })),
    mocks.length > 0 ? mocks : undefined,
  );
}
