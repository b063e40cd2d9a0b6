import { forEachLine, isComment } from './delimiter';
import type { ColumnName } from './delimiter';
import { finding, FindingList, MeasurementError, showCell, showName } from './errors';
import { cellsOf, dropTrailing, MAX_COLUMNS, readEcsvHead, readHead, type Head } from './head';
import type { EcsvHeader } from './formats/ecsv';
import { openFile } from './formats/open-file';
import { findNotFinite, type NumberTable } from './formats/table';
import { decodeText, hasDecimalComma, isWord, MAX_BYTES, readCell, type Cell } from './text';
import { requireColumns } from './columns';
import type { ColumnMapping, Finding, ParsedTable } from './types';

export interface ParseOptions {
  /** Which column means what; every column named here must exist. */
  columns?: ColumnMapping;
  /** Largest file, bytes; 64 MB unless given. */
  maxBytes?: number;
  /** Leaves what cells hold out of the messages. */
  withoutValues?: boolean;
  /** Fewest columns that make a table; 2 unless given, since κ and S are two. */
  fewest?: 1 | 2;
}

/**
 * Reads a table of a measurement: delimited text (gzip too), ECSV, NPY, NPZ, or a FITS binary table. Text: comma, semicolon, tab or runs of spaces; comments, blank lines, one header line, or names in
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
  const opened = openFile(bytes, fileName, 'file', options.maxBytes ?? MAX_BYTES);
  const table =
    opened.kind === 'numbers'
      ? namedTable(opened.table, options)
      : readText(opened.bytes, opened.ecsv, options);
  if (options.columns) requireColumns(table, options.columns);
  return table;
}

/** Columns of numbers as a table; rows stand in for lines. */
function namedTable(numbers: NumberTable, { withoutValues = false, fewest = 2 }: ParseOptions): ParsedTable {
  const { rows, data } = numbers;
  if (rows === 0)
    throw new MeasurementError('no-rows', 'The file has columns but no rows.', { part: 'file' });
  if (data.length > MAX_COLUMNS) {
    throw new MeasurementError('too-many-columns', `The file has ${data.length} columns.`, { part: 'file' });
  }
  if (data.length < fewest) {
    throw new MeasurementError('single-column', 'The file has a single column; κ and S are two.', {
      part: 'file',
    });
  }
  const given = numbers.columns.map(({ name, unit }, j) => ({
    name: name === '' ? `column ${j + 1}` : name,
    ...(unit === undefined ? {} : { unit }),
  }));
  const { columns, duplicates } = distinctNames(given, 0);
  const notFinite = findNotFinite(numbers, 'file', withoutValues);
  const findings = [...numbers.findings, ...duplicates, ...notFinite];
  return { columns, rows, data, lines: Int32Array.from({ length: rows }, (_, row) => row + 1), findings };
}

function readText(
  bytes: Uint8Array,
  ecsv: EcsvHeader | null,
  { withoutValues = false, fewest = 2 }: ParseOptions,
): ParsedTable {
  const { text, utf8 } = decodeText(bytes);
  const head = ecsv ? readEcsvHead(text, ecsv, fewest) : readHead(text, fewest);
  const reader = new RowReader(head, withoutValues);
  forEachLine(text, (line, number) => {
    if (number === head.headerLine || number === head.unitsLine || line.trim() === '' || isComment(line))
      return;
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
  return head.namesLine > 0 ? { columns, ...read, headerLine: head.namesLine } : { columns, ...read };
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
