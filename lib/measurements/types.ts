/** What reading a measurement file gives, and what its preflight finds. Pure. */

import type { FindingCode } from './codes';

export type FindingLevel = 'error' | 'warning' | 'note' | 'ok';

/** Which upload a finding is about. */
export type Part = 'file' | 'covariance' | 'mocks' | 'window' | 'columns' | 'theoryCovariance';

/** The uploads that are matrices of numbers without names. */
export type MatrixPart = Exclude<Part, 'file' | 'columns'>;

export interface Finding {
  /** Closed set, kebab-case: `missing-column`, `not-a-number`, `edges-ok` … */
  code: FindingCode;
  level: FindingLevel;
  /** What was found, one or two sentences. Contains no data values where `withoutValues` was asked for. */
  message: string;
  /** What to do about it. Absent where nothing has to be done. */
  remedy?: string;
  /** Which upload it is about. */
  part?: Part;
  /** 1-based line in the file. */
  line?: number;
  /** 1-based column in the file: the number of the cell in its row. */
  column?: number;
}

export interface ParsedTable {
  columns: { name: string; unit?: string }[];
  rows: number;
  /** By column; NaN where a cell is empty or not finite (each has a finding). */
  data: Float64Array[];
  /** 1-based line of each row in the file. */
  lines: Int32Array;
  /** 1-based line that holds the names, header or comment; absent where there is none. */
  headerLine?: number;
  findings: Finding[];
}

/** A file of numbers without names: a covariance, or mocks with one row a mock. */
export interface NumericMatrix {
  rows: number;
  columns: number;
  /** Row by row, rows · columns numbers; NaN where a cell could not be read (each has a finding). */
  data: Float64Array;
  /** 1-based line of each row in the file. */
  lines: Int32Array;
  findings: Finding[];
}

/** A column is named, or given by its 0-based number. */
export type ColumnRef = string | number;

/** Which column means what. Exactly one way of giving κ. */
export interface ColumnMapping {
  kappa?: ColumnRef;
  kappaLo?: ColumnRef;
  kappaHi?: ColumnRef;
  kLong?: ColumnRef;
  kShort?: ColumnRef;
  k1?: ColumnRef;
  k2?: ColumnRef;
  k3?: ColumnRef;
  S?: ColumnRef;
  /** The bispectrum of ζ, in the place of S. */
  B?: ColumnRef;
  /** Standard error of S, or of B. */
  sigma?: ColumnRef;
}

/** The power spectrum by which B becomes S: P(k) = A_s (k/k_*)^(n_s − 1), dimensionless. Units as they are written. */
export interface PowerSpectrum {
  amplitude?: number;
  /** n_s; 1 for none, and then the pivot doesn't matter. */
  tilt?: number;
  pivot?: number;
  /** `1/Mpc` unless given. */
  pivotUnit?: string;
  /** Where the file doesn't say it: `1/Mpc`, `h/Mpc`. */
  wavenumberUnit?: string;
  /** Where the file doesn't say it: `Mpc^6`, `(Mpc/h)^6`. */
  bispectrumUnit?: string;
  /** H₀/(100 km/s/Mpc), where units with and without h meet. */
  h?: number;
}

/** The same with everything that was used, and null for what was not. */
export interface ResolvedSpectrum {
  amplitude: number;
  tilt: number;
  pivot: number | null;
  pivotUnit: string | null;
  wavenumberUnit: string;
  bispectrumUnit: string;
  h: number | null;
}

/** What a column can mean. */
export type ColumnRole = keyof ColumnMapping;

/** A measurement in the product's own terms, rows in ascending κ. */
export interface Measurement {
  /** κ of each row: the κ column, else √(lo·hi), else k_long/k_short. */
  kappa: Float64Array;
  kappaLo: Float64Array | null;
  kappaHi: Float64Array | null;
  S: Float64Array;
  /** Standard errors if the file gave them. */
  sigma: Float64Array | null;
  /** The order in which the file's rows were taken (file row of each ascending row), to permute covariances and mocks. */
  order: Int32Array;
}

/** What a measurement covers, for the head of its page. */
export interface MeasurementSummary {
  rows: number;
  /** Lowest edge where there are edges, else the lowest κ. */
  kappaMin: number;
  /** Highest edge where there are edges, else the highest κ. */
  kappaMax: number;
  hasBinEdges: boolean;
  /** Resolution in μ, 2π/ln(kappaMax/kappaMin). Infinity for a single point. */
  resolution: number;
  /** Highest μ that the spacing resolves, π/Δ with Δ the median spacing in ln κ. Infinity for a single point. */
  nyquist: number;
}
