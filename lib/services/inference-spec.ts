import type { MeasurementVersion, NotebookSettings } from '@/models';
import { assemble, type InferenceSpec, type PartModel } from '@/lib/inference';
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

type StoredColumns = Pick<MeasurementVersion, 'rows' | 'hasBinEdges' | 'points'>;
type StoredPoints = StoredColumns &
  Pick<MeasurementVersion, 'covariance'> & {
    /** As `writeTheory` wrote it; null where nothing came with the measurement. */
    theory: Uint8Array | null;
  };
type StoredNumbers = StoredPoints & Pick<MeasurementVersion, 'mockCount'>;

/** Little-endian float64 of a stored column; byte by byte, because a buffer may start anywhere in memory. */
export function readDoubles(bytes: Buffer, name: string, length: number): Float64Array {
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

export interface NotebookInference {
  spec: InferenceSpec;
  /** Indices of the rows that the cuts keep, ascending. */
  kept: number[];
  /** Where the data are; a window's theory may be elsewhere. */
  axis: Axis;
}

/** What settings say is to be inferred from points that their cuts have kept; see `inferenceSpec`. */
export function specOnPoints(
  points: CutPoints,
  mockCount: number | null,
  settings: NotebookSettings,
): NotebookInference {
  const { id, options } = settings.template;
  return refusingFaults(() => {
    const settled = findTemplate(id).normaliseOptions(options);
    const { covariance: added } = points.theory;
    return {
      spec: assemble({
        parts: [
          {
            ...partModel(points, settled),
            data: { S: points.S, covariance: points.covariance, mockCount },
            ...(added ? { theoryCovariance: added } : {}),
          },
        ],
        template: { id, options },
        likelihood: likelihoodSchema.parse(settings.likelihood).kind,
        priors: priorsSchema.parse(settings.priors),
      }),
      kept: points.kept,
      axis: axisOf(points, settled),
    };
  });
}

/**
 * What a notebook's settings say is to be inferred from a measurement's version. Pure apart from reading the row.
 * A fault in cuts, template or options is `invalid` with its place; priors are checked where the posterior is built.
 */
export function inferenceSpec(version: StoredNumbers, settings: NotebookSettings): NotebookInference {
  return specOnPoints(cutPoints(version, settings.cuts), version.mockCount, settings);
}
