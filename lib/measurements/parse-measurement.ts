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
import { finding, FindingList, MeasurementError, showCell, showName } from './errors';
import { decodeText, hasDecimalComma, isWord, readCell, refuseOtherFormats, type Cell } from './text';
import { requireColumns } from './columns';
import type { ColumnMapping, Finding, ParsedTable } from './types';

/** Longest line of a measurement file, characters. */
export const MAX_LINE = 1_000_000;
/** Most columns of a measurement file. */
export const MAX_COLUMNS = 1_000;
/** Lines from which the delimiter is found. */
const SAMPLE = 64;

export interface ParseOptions {
  /** Which column means what; every column named here must exist. */
  columns?: ColumnMapping;
  /** Largest file, bytes; 64 MB unless given. */
  maxBytes?: number;
  /** Leaves what cells hold out of the messages. */
  withoutValues?: boolean;
}

/** The start of a file: what is needed before the first row can be read. */
interface Head {
  dialect: Dialect;
  names: ColumnName[];
  /** Line of the header, 0 if the names come from a comment or there are none. */
  headerLine: number;
  /** Line of the names, header or comment; 0 if there are none. */
  namesLine: number;
}

/**
 * Reads delimited text: comma, semicolon, tab or runs of spaces; comments, blank lines, one header line, or names in
 * the last comment before the data, or none ("column 1", …). Time and memory are linear in the size of the file.
 *
 * Cells that are no finite numbers become NaN and a finding of level error with line and column; rows with missing or
 * extra cells a finding with the line. Throws MeasurementError where no table can be made of the bytes.
 */
export function parseMeasurement(
  bytes: Uint8Array,
  fileName: string,
  options: ParseOptions = {},
): ParsedTable {
  refuseOtherFormats(bytes, fileName, 'file', options.maxBytes);
  const { text, utf8 } = decodeText(bytes);
  const head = readHead(text);
  const reader = new RowReader(head, options.withoutValues ?? false);
  forEachLine(text, (line, number) => {
    if (number === head.headerLine || line.trim() === '' || isComment(line)) return;
    reader.read(cellsOf(line, number, head.dialect), number);
  });
  if (reader.rows === 0)
    throw new MeasurementError('no-rows', 'The file has a header but no rows.', { part: 'file' });
  const findings: Finding[] = [];
  const { columns, duplicates } = distinctNames(head.names, head.namesLine);
  if (!utf8) {
    const message = 'The file is not UTF-8; characters beyond ASCII were read as Windows-1252.';
    findings.push(finding('not-utf8', 'note', message, { part: 'file' }));
  }
  findings.push(...duplicates);
  if (head.dialect.decimalComma) {
    const message = 'Numbers are read with a decimal comma: 1,25 is 1.25.';
    findings.push(finding('decimal-comma', 'warning', message, { part: 'file' }));
  }
  const read = reader.finish(columns, findings);
  const table = head.namesLine > 0 ? { columns, ...read, headerLine: head.namesLine } : { columns, ...read };
  if (options.columns) requireColumns(table, options.columns);
  return table;
}

interface Line {
  line: string;
  number: number;
}

function readHead(text: string): Head {
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
  if (dialect.cells < 2) {
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
  return { dialect, names, headerLine, namesLine: headerLine || (commented?.number ?? 0) };
}

function isNumber(cell: string, dialect: Dialect): boolean {
  return typeof readCell(cell) === 'number' || (dialect.decimalComma && hasDecimalComma(cell));
}

function cellsOf(line: string, number: number, dialect: Dialect): string[] {
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
function dropTrailing(cells: string[]): string[] {
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

/** Two columns of one name are told apart by their number, so that a mapping by name cannot take the wrong one. */
function distinctNames(names: ColumnName[], line: number): { columns: ColumnName[]; duplicates: Finding[] } {
  const first = new Map<string, number>();
  const repeated = new Set<string>();
  const duplicates: Finding[] = [];
  names.forEach(({ name }, j) => {
    const before = first.get(name);
    if (before === undefined) first.set(name, j);
    else {
      repeated.add(name);
      const message = `Columns ${before + 1} and ${j + 1} are both named ${showCell(name)}.`;
      const place = { part: 'file' as const, column: j + 1, ...(line > 0 ? { line } : {}) };
      if (duplicates.length < 20) duplicates.push(finding('duplicate-header', 'warning', message, place));
    }
  });
  const columns = names.map(({ name, unit }, j) => {
    const distinct = repeated.has(name) || name === '' ? `${name} (column ${j + 1})`.trim() : name;
    return unit === undefined ? { name: distinct } : { name: distinct, unit };
  });
  return { columns, duplicates };
}

/** Fills the columns row by row and notes what could not be read. */
class RowReader {
  rows = 0;
  readonly #head: Head;
  readonly #withoutValues: boolean;
  readonly #width: number;
  #data: Float64Array[];
  #lines = new Int32Array(256);
  readonly #numbers: Int32Array;
  readonly #words: Int32Array;
  readonly #bad: FindingList[];
  readonly #ragged = new FindingList();

  constructor(head: Head, withoutValues: boolean) {
    this.#head = head;
    this.#withoutValues = withoutValues;
    this.#width = head.names.length;
    this.#data = head.names.map(() => new Float64Array(256));
    this.#numbers = new Int32Array(this.#width);
    this.#words = new Int32Array(this.#width);
    this.#bad = head.names.map(() => new FindingList());
  }

  read(cells: string[], line: number): void {
    const width = this.#width;
    if (this.rows === this.#lines.length) this.#grow();
    const row = this.rows;
    this.rows += 1;
    this.#lines[row] = line;
    const found = cells.length === width + 1 ? dropTrailing(cells).length : cells.length;
    if (found !== width) {
      const message = `Line ${line} has ${found} cells where ${width} columns are expected.`;
      this.#ragged.add(() => finding('ragged-row', 'error', message, { part: 'file', line }));
    }
    for (let j = 0; j < width; j += 1) {
      // A missing cell is NaN; the finding about its row names the line.
      this.#data[j][row] = j < cells.length ? this.#value(cells[j], j, line) : NaN;
    }
  }

  #value(cell: string, j: number, line: number): number {
    const { value, code } = this.#readNumber(cell);
    if (code === null) {
      this.#numbers[j] += 1;
      return value;
    }
    if (code === 'not-a-number' && isWord(cell)) this.#words[j] += 1;
    this.#bad[j].add(() => {
      const what = {
        'empty-cell': 'is missing',
        'not-finite': 'is not finite',
        'not-a-number': 'is not a number',
        'mixed-decimals': 'has another decimal sign than the rest of the file',
      }[code];
      const shown = this.#withoutValues || code === 'empty-cell' ? '' : `: ${showCell(cell.trim())}`;
      const name = this.#head.names[j].name || `column ${j + 1}`;
      const message = `The value of ${showName(name)} ${what}${shown}.`;
      return finding(code, 'error', message, { part: 'file', line, column: j + 1 });
    });
    return NaN;
  }

  #readNumber(cell: string): { value: number; code: Exclude<Cell, number> | 'mixed-decimals' | null } {
    const { decimalComma, delimiter } = this.#head.dialect;
    const comma = cell.includes(',') && hasDecimalComma(cell);
    if (comma && !decimalComma && delimiter !== ',') return { value: NaN, code: 'mixed-decimals' };
    const read = readCell(comma && decimalComma ? cell.replace(',', '.') : cell);
    if (typeof read !== 'number') return { value: NaN, code: read };
    if (decimalComma && cell.includes('.')) return { value: NaN, code: 'mixed-decimals' };
    return { value: read, code: null };
  }

  #grow(): void {
    const size = this.#lines.length * 2;
    const longer = (old: Float64Array) => {
      const data = new Float64Array(size);
      data.set(old);
      return data;
    };
    this.#data = this.#data.map(longer);
    const lines = new Int32Array(size);
    lines.set(this.#lines);
    this.#lines = lines;
  }

  finish(columns: ColumnName[], before: Finding[]): Omit<ParsedTable, 'columns'> {
    const findings = [...before, ...this.#ragged.toFindings()];
    this.#bad.forEach((list, j) => {
      if (list.count === 0) return;
      // A column of words only (labels, names of files) is no fault unless it is mapped; then its rows are refused.
      if (this.rows > 1 && this.#words[j] === this.rows) {
        const message = `Column ${j + 1}, ${showCell(columns[j].name)}, holds words, not numbers.`;
        const place = { part: 'file' as const, line: this.#lines[0], column: j + 1 };
        findings.push(finding('text-column', 'warning', message, place));
      } else findings.push(...list.toFindings());
    });
    return {
      rows: this.rows,
      data: this.#data.map((column) => column.slice(0, this.rows)),
      lines: this.#lines.slice(0, this.rows),
      findings,
    };
  }
}
