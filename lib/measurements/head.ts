import {
  detectDialect,
  forEachLine,
  isComment,
  readName,
  splitLine,
  splitNames,
  UnclosedQuote,
} from './delimiter';
import type { ColumnName, Dialect } from './delimiter';
import { MeasurementError } from './errors';
import type { EcsvHeader } from './formats/ecsv';
import { hasDecimalComma, isWord, readCell } from './text';

/** Longest line of a measurement file, characters. */
export const MAX_LINE = 1_000_000;
/** Most columns of a measurement file. */
export const MAX_COLUMNS = 1_000;
/** Lines from which the delimiter is found. */
const SAMPLE = 64;

/** The start of a file: what is needed before the first row can be read. */
export interface Head {
  dialect: Dialect;
  names: ColumnName[];
  /** Line of the header, 0 if the names come from a comment or there are none. */
  headerLine: number;
  /** Line of units below the header, 0 if there is none. */
  unitsLine: number;
  /** Line of the names, header or comment; 0 if there are none. */
  namesLine: number;
}

interface Line {
  line: string;
  number: number;
}

/** Finds delimiter, names and units of delimited text; throws MeasurementError where there is no table. */
export function readHead(text: string, fewest: 1 | 2 = 2): Head {
  const sample: Line[] = [];
  const comments: Line[] = [];
  forEachLine(text, (line, number) => {
    if (line.length > MAX_LINE) {
      const message = `Line ${number} is longer than a million characters.`;
      throw new MeasurementError('line-too-long', message, { part: 'file', line: number });
    }
    if (line.trim() === '') return true;
    if (!isComment(line)) sample.push({ line, number });
    // Names can only stand in a comment before the data; a long preamble is kept by its end.
    else if (sample.length === 0) {
      comments.push({ line, number });
      if (comments.length > SAMPLE) comments.shift();
    }
    return sample.length < SAMPLE;
  });
  if (sample.length === 0) {
    const message = 'The file holds nothing but blank lines and comments.';
    throw new MeasurementError('empty-file', message, { part: 'file' });
  }
  const dialect = detectDialect(sample.map(({ line }) => line));
  const first = sample[0];
  const cells = dropTrailing(cellsOf(first.line, first.number, dialect));
  if (dialect.cells < fewest) {
    const message = `Line ${first.number} has a single column; κ and S are two.`;
    throw new MeasurementError('single-column', message, { part: 'file', line: first.number });
  }
  // A line with a number in it is data even if another cell is text: a row must not be eaten as a header.
  const isHeader = cells.some(isWord) && !cells.some((cell) => isNumber(cell, dialect));
  const headerCells = dialect.delimiter === ' ' && isHeader ? splitNames(first.line) : cells;
  const rows = sample.slice(isHeader ? 1 : 0);
  const trailing = rows.every(({ line }) => line.trimEnd().endsWith(dialect.delimiter));
  const width = dialect.cells - (trailing && dialect.delimiter !== ' ' && rows.length > 0 ? 1 : 0);
  const commented = isHeader ? null : namesOfComments(comments, width, dialect);
  const names = isHeader
    ? headerCells.map(readName)
    : (commented?.names ?? Array.from({ length: width }, (_, j) => ({ name: `column ${j + 1}` })));
  if (names.length > MAX_COLUMNS) {
    const message = `The file has ${names.length} columns.`;
    throw new MeasurementError('too-many-columns', message, { part: 'file', line: first.number });
  }
  const headerLine = isHeader ? first.number : 0;
  const units = isHeader ? unitsBelow(rows, names.length, dialect) : null;
  return {
    dialect,
    names: names.map((name, j) => withUnit(name, units?.cells[j])),
    headerLine,
    unitsLine: units?.number ?? 0,
    namesLine: headerLine || (commented?.number ?? 0),
  };
}

function isNumber(cell: string, dialect: Dialect): boolean {
  return typeof readCell(cell) === 'number' || (dialect.decimalComma && hasDecimalComma(cell));
}

/** Cells of one line; throws MeasurementError for a line too long or a quote left open. */
export function cellsOf(line: string, number: number, dialect: Dialect): string[] {
  if (line.length > MAX_LINE) {
    const message = `Line ${number} is longer than a million characters.`;
    throw new MeasurementError('line-too-long', message, { part: 'file', line: number });
  }
  try {
    return splitLine(line, dialect.delimiter);
  } catch (error) {
    if (!(error instanceof UnclosedQuote)) throw error;
    const message = `A quote on line ${number} is not closed.`;
    throw new MeasurementError('unclosed-quote', message, { part: 'file', line: number });
  }
}

/** A delimiter at the end of the line leaves an empty last cell. */
export function dropTrailing(cells: string[]): string[] {
  return cells.length > 1 && cells[cells.length - 1].trim() === '' ? cells.slice(0, -1) : cells;
}

/** The names in the last comment that has one word a column, with or without "columns:" before them. */
function namesOfComments(
  comments: Line[],
  width: number,
  dialect: Dialect,
): { names: ColumnName[]; number: number } | null {
  for (const { line, number } of comments.toReversed()) {
    const words = line.replace(/^\s*[#%!\s]+/, '').replace(/^(?:columns?|names?)\s*[:=]\s*/i, '');
    for (const cells of [splitNames(words), words.split(dialect.delimiter), words.split(',')]) {
      const names = cells.map(readName);
      if (names.length === width && names.every(({ name }) => /^["$\\]?\p{L}/u.test(name)))
        return { names, number };
    }
  }
  return null;
}

function withUnit(column: ColumnName, unit: string | undefined): ColumnName {
  const text = unit?.trim().replace(/^[[(](.*)[\])]$/, '$1') ?? '';
  return column.unit !== undefined || /^[-–—]*$/.test(text) ? column : { ...column, unit: text };
}

/** A line of units below the names: as many cells, none a number, some of them words; numbers below it. */
function unitsBelow(
  rows: readonly Line[],
  width: number,
  dialect: Dialect,
): { cells: string[]; number: number } | null {
  if (rows.length < 2) return null;
  const [{ line, number }, next] = rows;
  const all = cellsOf(line, number, dialect);
  const cells = all.length === width ? all : dropTrailing(all);
  const below = cellsOf(next.line, next.number, dialect);
  const words = cells.filter(isWord).length;
  if (cells.length !== width || words === 0 || cells.some((cell) => isNumber(cell, dialect))) return null;
  // "nan" and "n/a" are values that are missing, not units.
  const unit = (cell: string) => isWord(cell) || /^\s*[-–—]*\s*$/.test(cell);
  return cells.every(unit) && below.some((cell) => isNumber(cell, dialect)) ? { cells, number } : null;
}

/** The head of an ECSV table: names and units from its YAML, in the order of the line of names. */
export function readEcsvHead(text: string, { columns, delimiter }: EcsvHeader, fewest: 1 | 2 = 2): Head {
  let found: Line | null = null;
  forEachLine(text, (line, number) => {
    if (line.trim() === '' || isComment(line)) return;
    found = { line, number };
    return false;
  });
  const first = found as Line | null;
  if (first === null) {
    throw new MeasurementError('empty-file', 'The file holds nothing but its header.', { part: 'file' });
  }
  const dialect: Dialect = { delimiter, decimalComma: false, cells: columns.length };
  const names = cellsOf(first.line, first.number, dialect);
  if (names.length !== columns.length || names.some((name, j) => name !== columns[j].name)) {
    throw new MeasurementError(
      'damaged-file',
      `The names on line ${first.number} are not those that the ECSV header lists.`,
      { part: 'file', line: first.number },
    );
  }
  if (columns.length < fewest) {
    throw new MeasurementError('single-column', 'The table has a single column; κ and S are two.', {
      part: 'file',
      line: first.number,
    });
  }
  if (columns.length > MAX_COLUMNS) {
    throw new MeasurementError('too-many-columns', `The file has ${columns.length} columns.`, {
      part: 'file',
    });
  }
  return { dialect, names: columns, headerLine: first.number, unitsLine: 0, namesLine: first.number };
}
