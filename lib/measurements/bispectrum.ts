import {
  convertedFinding,
  settleSpectrum,
  shapeFactor,
  type SpectrumScales,
  type Triangle,
} from './spectrum';
import type { ColumnRole, Finding, ParsedTable, PowerSpectrum, ResolvedSpectrum } from './types';

/** B as the shape function S, in the order of the file's rows. */
export interface ConvertedShape {
  S: Float64Array;
  sigma: Float64Array | null;
  /** S = factor · B in the file's units; the covariance takes the factors of both bins, each mock its bin's. */
  factors: Float64Array;
  spectrum: ResolvedSpectrum;
}

type Columns = Partial<Record<ColumnRole, number>>;

/** The three sides of a row: k1, k2, k3, or k_short twice and k_long. */
function triangleAt(
  table: ParsedTable,
  columns: Columns,
  scale: SpectrumScales['wavenumber'],
  row: number,
): Triangle {
  const side = (role: ColumnRole) => table.data[columns[role]!][row] * (scale[role] ?? 1);
  return columns.kLong === undefined
    ? [side('k1'), side('k2'), side('k3')]
    : [side('kShort'), side('kShort'), side('kLong')];
}

/**
 * Turns the column B and its standard errors into S, row by row, by `shapeFactor`. A mapping with B has k_long and k_short, or k1, k2
 * and k3. Null where the spectrum isn't complete or units can't be settled; findings say why.
 */
export function convertBispectrum(
  table: ParsedTable,
  columns: Columns,
  given: PowerSpectrum,
): { converted: ConvertedShape | null; findings: Finding[] } {
  const { scales, findings } = settleSpectrum(table, columns, given);
  if (!scales || columns.B === undefined) return { converted: null, findings };
  const { spectrum, pivot, bispectrum, wavenumber } = scales;
  const factors = Float64Array.from(
    { length: table.rows },
    (_, row) => bispectrum * shapeFactor(triangleAt(table, columns, wavenumber, row), spectrum, pivot),
  );
  const timesFactor = (column: number) => table.data[column].map((value, row) => value * factors[row]);
  return {
    converted: {
      S: timesFactor(columns.B),
      sigma: columns.sigma === undefined ? null : timesFactor(columns.sigma),
      factors,
      spectrum,
    },
    findings: [...findings, convertedFinding(spectrum, factors, columns.B)],
  };
}
