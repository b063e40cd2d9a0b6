import type { ParameterDeclaration } from './types';

/** What a column that came with a measurement may be called: its name is that of its coefficient, in priors and in sample files. */
const COLUMN_NAME = /^[A-Za-z][A-Za-z0-9_]{0,31}$/;

/** Names that templates, their derived quantities and sample files have taken, whatever the options. */
const TAKEN =
  /^(mu\d|nu\d|[ab]\d|A\d|phi\d|theta(12|13)?|angle\d|g|alpha|c(m1|\d)|w\d|M2_\d+|m\d_over_H|rho_over_Lambda|replica|draw|warmup|log_(likelihood|prior))$/;

/**
 * Why a column can't have this name, in words that end a sentence beginning with it; null for a good name. Letters, digits and underscores
 * survive every format of samples (CSV, ECSV, FITS, NPZ, Parquet) as they are.
 */
export function columnNameFault(name: string): string | null {
  if (!COLUMN_NAME.test(name)) {
    return 'is no name for a column: at most 32 letters, digits and underscores, a letter first';
  }
  if (TAKEN.test(name)) return 'is the name of a parameter or of a quantity that samples hold already';
  return null;
}

/** d of the column of this name. Its unit is that of S over that of the column. */
export function columnParameter(name: string): ParameterDeclaration {
  return {
    name,
    tex: `d_{\\mathrm{${name.replaceAll('_', '\\_')}}}`,
    symbol: { base: 'd', sub: name },
    label: `column ${name}`,
    unit: '',
    role: 'column',
    field: null,
    range: [-Infinity, Infinity],
    circular: false,
    defaultPrior: { kind: 'normal', mean: 0, sd: 1 },
  };
}

/**
 * The same parameter as that of one measurement among several: `c1` of the second is `c1_2`. An underscore and the number of the
 * measurement, counted from 1, stand at the end of the name; the label says which measurement it is.
 */
export function ofPart(parameter: ParameterDeclaration, part: number, label: string): ParameterDeclaration {
  const number = String(part + 1);
  return {
    ...parameter,
    name: `${parameter.name}_${number}`,
    tex: `${parameter.tex}^{(${number})}`,
    symbol: { ...parameter.symbol, sub: `${parameter.symbol.sub} (${number})` },
    label: `${parameter.label}, ${label}`,
  };
}

/** The name without the number of a measurement, and that number counted from 0 (0 where there is none). */
export function partOfName(name: string): { name: string; part: number } {
  const found = /^(.+)_(\d+)$/.exec(name);
  return found ? { name: found[1], part: Number(found[2]) - 1 } : { name, part: 0 };
}
