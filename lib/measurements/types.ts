/** What reading a measurement file gives, and what its preflight finds. Pure. */

export type FindingLevel = 'error' | 'warning' | 'note' | 'ok';

export interface Finding {
  /** Closed set, kebab-case: `missing-column`, `not-a-number`, `edges-ok` … */
  code: string;
  level: FindingLevel;
  /** What was found and what to do about it, one or two sentences. Contains no data values where `withoutValues` was asked for. */
  message: string;
  /** Which upload it is about. */
  part?: 'file' | 'covariance' | 'mocks';
  /** 1-based line in the file. */
  line?: number;
  /** 1-based column in the file. */
  column?: number;
}

export interface ParsedTable {
  columns: { name: string; unit?: string }[];
  rows: number;
  /** By column; NaN where a cell is empty or not finite (each has a finding). */
  data: Float64Array[];
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
  sigma?: ColumnRef;
}

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
