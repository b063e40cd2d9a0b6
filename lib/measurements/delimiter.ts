import { hasDecimalComma, isWord, readCell } from './text';

/** How cells are separated; a space stands for any run of white space. */
export type Delimiter = ',' | ';' | '\t' | ' ';

/** How a file writes its cells. */
export interface Dialect {
  delimiter: Delimiter;
  /** 1,25 means 1.25. */
  decimalComma: boolean;
  /** Most frequent number of cells in a line of the sample. */
  cells: number;
}

/** Calls `visit` with each line and its 1-based number; line ends LF, CRLF and CR. Stops when it returns false. */
export function forEachLine(text: string, visit: (line: string, number: number) => boolean | void): void {
  let start = 0;
  let number = 0;
  let feed = text.indexOf('\n');
  let carriage = text.indexOf('\r');
  while (start <= text.length) {
    // Each search result is used until passed, so that the whole is linear in the length of the text.
    if (feed >= 0 && feed < start) feed = text.indexOf('\n', start);
    if (carriage >= 0 && carriage < start) carriage = text.indexOf('\r', start);
    let end = text.length;
    if (feed >= 0) end = feed;
    if (carriage >= 0 && carriage < end) end = carriage;
    number += 1;
    if (visit(text.slice(start, end), number) === false) return;
    start = end + (text[end] === '\r' && text[end + 1] === '\n' ? 2 : 1);
  }
}

/** A line that begins with #, % or !: the comment signs of scripts and of Fortran. */
export function isComment(line: string): boolean {
  return /^\s*[#%!]/.test(line);
}

/** Thrown by `splitLine`; the caller knows which line it was. */
export class UnclosedQuote extends Error {}

/** Cells of one line. A cell that begins with a double quote ends with one; two in a row stand for one. */
export function splitLine(line: string, delimiter: Delimiter): string[] {
  const hash = line.indexOf('#');
  if (!line.includes('"')) {
    const content = hash >= 0 ? line.slice(0, hash) : line;
    if (delimiter === ' ') return content.trim() === '' ? [] : content.trim().split(/\s+/);
    return content.split(delimiter);
  }
  return splitQuoted(line, delimiter);
}

function splitQuoted(line: string, delimiter: Delimiter): string[] {
  const isEnd = (at: number) =>
    delimiter === ' ' ? /\s/.test(line[at] ?? ' ') : at >= line.length || line[at] === delimiter;
  const cells: string[] = [];
  let at = 0;
  for (;;) {
    while (at < line.length && /\s/.test(line[at]) && line[at] !== delimiter) at += 1;
    if (delimiter === ' ') {
      while (at < line.length && /\s/.test(line[at])) at += 1;
      if (at >= line.length) return cells;
    }
    if (line[at] === '#') return cells;
    const pieces: string[] = [];
    if (line[at] === '"') {
      at += 1;
      for (;;) {
        const close = line.indexOf('"', at);
        if (close < 0) throw new UnclosedQuote();
        pieces.push(line.slice(at, close));
        at = close + 1;
        if (line[at] !== '"') break;
        pieces.push('"');
        at += 1;
      }
    }
    const rest = at;
    while (!isEnd(at)) at += 1;
    cells.push(pieces.join('') + line.slice(rest, at).trim());
    if (at >= line.length) return cells;
    at += 1;
  }
}

/**
 * Finds the delimiter from the first lines that are neither blank nor comment. Each candidate is scored by the share of
 * lines with the most frequent number of cells, times the share of cells that can be numbers; equal scores go to the
 * first of tab, semicolon, comma, space. Commas within cells are decimal commas where no cell has a point.
 */
export function detectDialect(sample: string[]): Dialect {
  let best: Dialect = { delimiter: ',', decimalComma: false, cells: 1 };
  let bestScore = -1;
  for (const delimiter of ['\t', ';', ',', ' '] as const) {
    const rows = sample.map((line) => splitOrOne(line, delimiter));
    const cells = mostFrequent(rows.map((row) => row.length));
    if (cells < 2) continue;
    const values = (rows.length > 1 ? rows.slice(1) : rows).flat();
    const decimalComma =
      delimiter !== ',' &&
      values.some(hasDecimalComma) &&
      !values.some((cell) => cell.includes('.') && typeof readCell(cell) === 'number');
    let good = 0;
    for (const cell of values) {
      if (cell.trim() === '') good += 0.5;
      else if (!isWord(cell) && (delimiter === ',' || decimalComma || !hasDecimalComma(cell))) good += 1;
    }
    const regular = rows.filter((row) => row.length === cells).length / rows.length;
    const score =
      regular * (good / values.length + 0.01) + 1e-6 * Math.min(cells, 100) * (good === 0 ? 1 : 0);
    if (score > bestScore) {
      bestScore = score;
      best = { delimiter, decimalComma, cells };
    }
  }
  return best;
}

function splitOrOne(line: string, delimiter: Delimiter): string[] {
  try {
    return splitLine(line, delimiter);
  } catch (error) {
    if (error instanceof UnclosedQuote) return [line];
    throw error;
  }
}

function mostFrequent(counts: number[]): number {
  const times = new Map<number, number>();
  let best = 0;
  for (const count of counts) {
    const n = (times.get(count) ?? 0) + 1;
    times.set(count, n);
    if (n > (times.get(best) ?? 0)) best = count;
  }
  return best;
}

/** A column's name and its unit, if one stands behind it in brackets. */
export interface ColumnName {
  name: string;
  unit?: string;
}

/** `k_long [h/Mpc]` and `k_long (h/Mpc)` → name and unit; `S(k)` stays a name. A leading number `3:` is dropped. */
export function readName(cell: string): ColumnName {
  const text = cell.trim().replace(/^\(?\d{1,3}\)?\s*[:.)]\s*/, '');
  const open = text.endsWith(']') ? text.lastIndexOf('[') : text.endsWith(')') ? text.lastIndexOf('(') : -1;
  // A round bracket is a unit only behind a space: sigma(S) is a name.
  if (open > 0 && (text[open] === '[' || /\s/.test(text[open - 1]))) {
    return { name: text.slice(0, open).trim(), unit: text.slice(open + 1, -1).trim() };
  }
  return { name: text };
}

/** Names of a line whose columns are separated by spaces: a unit in brackets belongs to the name before it. */
export function splitNames(line: string): string[] {
  const names: string[] = [];
  for (const piece of line.match(/"(?:[^"]|"")*"|[[(][^\])]*[\])]|[^\s[("]+[^\s["]*/g) ?? []) {
    if (/^[[(]/.test(piece) && names.length > 0) names[names.length - 1] += ` ${piece}`;
    else names.push(piece.replace(/^"(.*)"$/, '$1').replaceAll('""', '"'));
  }
  return names;
}
