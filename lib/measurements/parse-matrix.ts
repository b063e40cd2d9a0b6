import { detectDialect, isComment, splitLine, UnclosedQuote } from './delimiter';
import { recogniseNames } from './columns';
import { finding, FindingList, MeasurementError, showCell, showNumber } from './errors';
import { openFile } from './formats/open-file';
import { findNotFinite, type NumberTable } from './formats/table';
import { decodeText, hasDecimalComma, isWord, MAX_BYTES, readCell } from './text';
import type { Finding, MatrixPart, NumericMatrix, Part } from './types';

/** Longest line of a matrix, bytes: a row of some hundred thousand numbers. */
export const MAX_MATRIX_LINE = 8 * 1024 * 1024;

export interface MatrixOptions {
  part: MatrixPart;
  /** Largest file, bytes; 64 MB unless given. */
  maxBytes?: number;
  /** Leaves what cells hold out of the messages. */
  withoutValues?: boolean;
}

const powersOfTen = Float64Array.from({ length: 23 }, (_, i) => Number(`1e${i}`));
const [TAB, LF, CR, SPACE, QUOTE, HASH, PERCENT, PLUS, COMMA, MINUS, POINT, SEMICOLON] = Array.from(
  '\t\n\r "#%+,-.;',
  (sign) => sign.charCodeAt(0),
);

/**
 * Reads a matrix of numbers without names, one row a line: separated by commas, semicolons, tabs or spaces, with comments
 * and blank lines. A header of names, or one that counts the columns, is skipped and reported (`matrix-header`).
 * Cells that are no finite numbers and rows of another length become findings of level error. Linear in the size of the file.
 *
 * A number of at most 15 digits with a decimal exponent of at most 22 is one exact product or quotient of doubles
 * (W. D. Clinger, How to read floating point numbers accurately, 1990); every other one goes through the engine's own reading.
 */
export function parseMatrix(bytes: Uint8Array, fileName: string, options: MatrixOptions): NumericMatrix {
  const { part } = options;
  const opened = openFile(bytes, fileName, part, options.maxBytes ?? MAX_BYTES);
  if (opened.kind === 'numbers') return matrixOf(opened.table, part, options.withoutValues ?? false);
  // The names of an ECSV table are one line above its rows, which is all that a matrix needs to know of it.
  const start = readStart(opened.bytes, part, opened.ecsv !== null);
  const reader = new MatrixReader(opened.bytes, start.comma, start.decimalComma, options);
  reader.read(start.headerLine);
  const findings: Finding[] = [];
  if (start.headerLine > 0) {
    const message = `Line ${start.headerLine} was taken as a header and left out.`;
    findings.push(finding('matrix-header', 'note', message, { part, line: start.headerLine }));
  }
  if (start.decimalComma) {
    const message = 'Numbers are read with a decimal comma: 1,25 is 1.25.';
    findings.push(finding('decimal-comma', 'warning', message, { part }));
  }
  return reader.finish(findings);
}

/** Columns of numbers as a matrix, row by row; rows stand in for lines. */
function matrixOf(table: NumberTable, part: MatrixPart, withoutValues: boolean): NumericMatrix {
  const { rows, data } = table;
  if (rows === 0) throw new MeasurementError('no-rows', 'The file has columns but no rows.', { part });
  if (recogniseNames(table.columns.map(({ name }) => name))) {
    const message = 'The file has named columns of κ or S: it looks like a measurement.';
    throw new MeasurementError('looks-like-table', message, { part });
  }
  const findings = [...table.findings, ...findNotFinite(table, part, withoutValues)];
  const columns = data.length;
  const values = new Float64Array(rows * columns);
  for (let j = 0; j < columns; j += 1) {
    for (let i = 0; i < rows; i += 1) values[i * columns + j] = data[j][i];
  }
  return {
    rows,
    columns,
    data: values,
    lines: Int32Array.from({ length: rows }, (_, row) => row + 1),
    findings,
  };
}

interface Start {
  /** Byte that separates cells besides white space; 0 if only white space does. */
  comma: number;
  decimalComma: boolean;
  headerLine: number;
}

/** Looks at the first lines for delimiter, decimal sign and header. */
function readStart(bytes: Uint8Array, part: Part, named: boolean): Start {
  const sample: { line: string; number: number }[] = [];
  let at = 0;
  let number = 0;
  // A few whole lines, taken line by line because one row may be megabytes long.
  while (at < bytes.length && sample.length < 4) {
    const end = lineEnd(bytes, at);
    number += 1;
    if (end - at > MAX_MATRIX_LINE) {
      const message = `Line ${number} is longer than ${MAX_MATRIX_LINE / 1024 / 1024} MB.`;
      throw new MeasurementError('line-too-long', message, { part, line: number });
    }
    const line = decodeText(bytes.subarray(at, end)).text;
    if (line.trim() !== '' && !isComment(line)) sample.push({ line, number });
    at = end + (bytes[end] === CR && bytes[end + 1] === LF ? 2 : 1);
  }
  if (sample.length === 0) {
    throw new MeasurementError('empty-file', 'The file holds nothing but blank lines and comments.', {
      part,
    });
  }
  const dialect = detectDialect(sample.map(({ line }) => line));
  const first = sample[0];
  let cells: string[];
  try {
    cells = splitLine(first.line, dialect.delimiter).map((cell) => cell.trim());
  } catch (error) {
    if (!(error instanceof UnclosedQuote)) throw error;
    const message = `A quote on line ${first.number} is not closed.`;
    throw new MeasurementError('unclosed-quote', message, { part, line: first.number });
  }
  const words =
    cells.some(isWord) && !cells.some((cell) => typeof readCell(cell) === 'number' || hasDecimalComma(cell));
  if (words && recogniseNames(cells)) {
    const message = 'The file has named columns of κ or S: it looks like a measurement.';
    throw new MeasurementError('looks-like-table', message, { part, line: first.number });
  }
  const header = named || words || (sample.length > 1 && countsColumns(cells));
  const comma = dialect.delimiter === ',' ? COMMA : dialect.delimiter === ';' ? SEMICOLON : 0;
  return { comma, decimalComma: dialect.decimalComma, headerLine: header ? first.number : 0 };
}

/** 0, 1, 2, … or 1, 2, 3, …, perhaps behind an empty cell: column numbers that a program wrote as names. */
function countsColumns(cells: string[]): boolean {
  const numbers = (cells[0] === '' ? cells.slice(1) : cells).map(Number);
  return (
    numbers.length >= 4 &&
    numbers[0] <= 1 &&
    numbers.every((value, j) => value === numbers[0] + j && value >= 0)
  );
}

function lineEnd(bytes: Uint8Array, from: number): number {
  let at = from;
  while (at < bytes.length && bytes[at] !== LF && bytes[at] !== CR) at += 1;
  return at;
}

class MatrixReader {
  readonly #bytes: Uint8Array;
  readonly #comma: number;
  readonly #decimal: number;
  readonly #options: MatrixOptions;
  #data: Float64Array;
  #length = 0;
  #columns = 0;
  #rows = 0;
  #lines = new Int32Array(256);
  /** Where the line that is being read begins, and its text once it was needed. */
  #lineStart = 0;
  #text: string | null = null;
  readonly #bad = new FindingList();
  readonly #ragged = new FindingList();

  constructor(bytes: Uint8Array, comma: number, decimalComma: boolean, options: MatrixOptions) {
    this.#bytes = bytes;
    this.#comma = comma;
    this.#decimal = decimalComma ? COMMA : POINT;
    this.#options = options;
    this.#data = new Float64Array(Math.max(256, bytes.length >> 3));
  }

  read(headerLine: number): void {
    const bytes = this.#bytes;
    // A byte-order mark is no part of the first number.
    let at = bytes[0] === 0xef && bytes[1] === 0xbb && bytes[2] === 0xbf ? 3 : 0;
    let line = 0;
    while (at < bytes.length) {
      line += 1;
      while (at < bytes.length && isBlank(bytes[at])) at += 1;
      const first = bytes[at];
      const comment = first === HASH || first === PERCENT || first === 33;
      if (line === headerLine || comment) at = lineEnd(bytes, at);
      else if (at < bytes.length && first !== LF && first !== CR) at = this.#row(at, line);
      at += bytes[at] === CR && bytes[at + 1] === LF ? 2 : 1;
    }
  }

  /** Reads the row that begins at `at`; gives where its line ends. */
  #row(at: number, line: number): number {
    const bytes = this.#bytes;
    const begin = this.#length;
    const start = at;
    this.#lineStart = start;
    this.#text = null;
    for (;;) {
      while (at < bytes.length && isBlank(bytes[at])) at += 1;
      const byte = bytes[at];
      const over = at >= bytes.length || byte === LF || byte === CR || byte === HASH;
      // Behind the last delimiter of a line there is no further cell.
      if (over) break;
      at = this.#cell(at, line, this.#length - begin);
      while (at < bytes.length && isBlank(bytes[at])) at += 1;
      if (this.#comma !== 0 && bytes[at] === this.#comma) at += 1;
    }
    at = lineEnd(bytes, at);
    if (at - start > MAX_MATRIX_LINE) {
      const message = `Line ${line} is longer than ${MAX_MATRIX_LINE / 1024 / 1024} MB.`;
      throw new MeasurementError('line-too-long', message, { part: this.#options.part, line });
    }
    this.#endRow(begin, line);
    return at;
  }

  #endRow(begin: number, line: number): void {
    const found = this.#length - begin;
    if (this.#rows === 0) this.#columns = found;
    if (found !== this.#columns) {
      const message = `Line ${line} has ${showNumber(found)} cells, the first row ${showNumber(this.#columns)}.`;
      this.#ragged.add(() => finding('ragged-row', 'error', message, { part: this.#options.part, line }));
      while (this.#length < begin + this.#columns) this.#push(NaN);
      this.#length = begin + this.#columns;
    }
    if (this.#rows === this.#lines.length) {
      const lines = new Int32Array(2 * this.#rows);
      lines.set(this.#lines);
      this.#lines = lines;
    }
    this.#lines[this.#rows] = line;
    this.#rows += 1;
  }

  /** Reads one cell that begins at `at` and is not blank; gives where it ends. */
  #cell(at: number, line: number, column: number): number {
    const bytes = this.#bytes;
    let i = at;
    const sign = bytes[i];
    if (sign === PLUS || sign === MINUS) i += 1;
    let mantissa = 0;
    let digits = 0;
    let exponent = 0;
    let any = false;
    let point = false;
    for (; ; i += 1) {
      const digit = bytes[i] - 48;
      if (digit >= 0 && digit <= 9) {
        any = true;
        if (digits > 0 || digit > 0) digits += 1;
        if (digits <= 15) mantissa = mantissa * 10 + digit;
        if (point) exponent -= 1;
      } else if (bytes[i] === this.#decimal && !point) point = true;
      else break;
    }
    const letter = bytes[i] | 32;
    if (any && (letter === 101 || letter === 100)) {
      let j = i + 1;
      const negative = bytes[j] === MINUS;
      if (negative || bytes[j] === PLUS) j += 1;
      let value = 0;
      const from = j;
      for (; bytes[j] >= 48 && bytes[j] <= 57; j += 1) value = Math.min(9999, value * 10 + bytes[j] - 48);
      if (j > from) {
        exponent += negative ? -value : value;
        i = j;
      }
    }
    if (any && this.#endsCell(i)) {
      const size = Math.abs(exponent);
      if (digits <= 15 && (size <= 22 || mantissa === 0)) {
        const scaled =
          mantissa === 0 ? 0 : exponent < 0 ? mantissa / powersOfTen[size] : mantissa * powersOfTen[size];
        this.#push(sign === MINUS ? -scaled : scaled);
        return i;
      }
      const value = this.#longNumber(at, i);
      if (Number.isFinite(value)) {
        this.#push(value);
        return i;
      }
    }
    return this.#slowCell(at, line, column);
  }

  /** A number of many digits, by the engine. The line is decoded once, byte by byte, for all of its cells. */
  #longNumber(at: number, end: number): number {
    if (this.#text === null) {
      const line = this.#bytes.subarray(this.#lineStart, lineEnd(this.#bytes, at));
      this.#text = new TextDecoder('windows-1252').decode(line);
    }
    const text = this.#text.slice(at - this.#lineStart, end - this.#lineStart);
    const pointed = this.#decimal === COMMA ? text.replace(',', '.') : text;
    return Number(/[dD]/.test(pointed) ? pointed.replace(/[dD]/, 'e') : pointed);
  }

  /** True if a cell may end at `at`: between delimiters only blanks can stand before the next one. */
  #endsCell(at: number): boolean {
    let end = at;
    if (this.#comma !== 0) while (isBlank(this.#bytes[end])) end += 1;
    const byte = this.#bytes[end];
    const over = end >= this.#bytes.length || byte === LF || byte === CR || byte === HASH;
    return over || (this.#comma !== 0 ? byte === this.#comma : isBlank(byte));
  }

  /** Long mantissas, Fortran's letterless exponents, quotes, and everything that is no number. */
  #slowCell(at: number, line: number, column: number): number {
    const bytes = this.#bytes;
    let end = at;
    const inCommas = this.#comma !== 0;
    while (end < bytes.length && bytes[end] !== LF && bytes[end] !== CR && bytes[end] !== HASH) {
      // Between delimiters blanks belong to the cell: "1 2" is then one cell that is no number.
      if (inCommas ? bytes[end] === this.#comma : isBlank(bytes[end])) break;
      end += 1;
    }
    let text = decodeText(bytes.subarray(at, end)).text.trim();
    if (bytes[at] === QUOTE && text.endsWith('"')) text = text.slice(1, -1);
    const comma = this.#decimal === COMMA && hasDecimalComma(text);
    const read = readCell(comma ? text.replace(',', '.') : text);
    const mixed = typeof read === 'number' && this.#decimal === COMMA && text.includes('.');
    if (typeof read === 'number' && !mixed) this.#push(read);
    else {
      this.#push(NaN);
      const code = typeof read === 'number' ? 'mixed-decimals' : read;
      this.#bad.add(() => {
        const what = {
          'empty-cell': 'is empty',
          'not-finite': 'is not finite',
          'not-a-number': 'is not a number',
          'mixed-decimals': 'has a decimal point where the file has commas',
        }[code];
        const shown = this.#options.withoutValues || code === 'empty-cell' ? '' : `: ${showCell(text)}`;
        const place = { part: this.#options.part, line, column: column + 1 };
        return finding(
          code,
          'error',
          `The value in row ${this.#rows + 1} ${what}${shown}.`,
          place,
          MATRIX_REMEDY,
        );
      });
    }
    return end;
  }

  #push(value: number): void {
    if (this.#length === this.#data.length) {
      const data = new Float64Array(2 * this.#length);
      data.set(this.#data);
      this.#data = data;
    }
    this.#data[this.#length] = value;
    this.#length += 1;
  }

  finish(before: Finding[]): NumericMatrix {
    if (this.#rows === 0) {
      throw new MeasurementError('no-rows', 'The file has a header but no rows.', {
        part: this.#options.part,
      });
    }
    return {
      rows: this.#rows,
      columns: this.#columns,
      data: this.#data.slice(0, this.#rows * this.#columns),
      lines: this.#lines.slice(0, this.#rows),
      findings: [...before, ...this.#ragged.toFindings(), ...this.#bad.toFindings()],
    };
  }
}

const MATRIX_REMEDY = 'Write the number; every row and column of a matrix must be complete.';

function isBlank(byte: number): boolean {
  return byte === SPACE || byte === TAB || byte === 11 || byte === 12;
}
