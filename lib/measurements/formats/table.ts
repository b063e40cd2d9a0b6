import { finding, FindingList, MeasurementError, showCell } from '../errors';
import type { Finding, Part } from '../types';

/** Most numbers that a binary file may hold: 128 MB as doubles. */
export const MAX_CELLS = 16_000_000;
/** Most columns of a binary table. */
export const MAX_TABLE_COLUMNS = 1_000;

/** Numbers that a file holds in columns, with whatever names it gives them. */
export interface NumberTable {
  /** The name is empty where the file gives none. */
  columns: { name: string; unit?: string }[];
  rows: number;
  data: Float64Array[];
  /** What was left out or is odd; cells that aren't finite are found later. */
  findings: Finding[];
}

/** A file that says one thing of itself and is another: cut off, altered, or made up. */
export function damaged(part: Part, message: string): MeasurementError {
  return new MeasurementError('damaged-file', message, { part });
}

/** A format, or a kind of it, that isn't read. */
export function notRead(part: Part, name: string, remedy?: string): MeasurementError {
  return new MeasurementError('format-not-read', `This is ${name}, which is not read.`, { part }, remedy);
}

/** Refuses sizes beyond MAX_CELLS before anything is allocated. */
export function requireCells(part: Part, rows: number, columns: number): void {
  if (columns > MAX_TABLE_COLUMNS && rows * columns > MAX_CELLS) {
    throw new MeasurementError('file-too-large', `The file holds ${rows} × ${columns} numbers.`, { part });
  }
  if (rows * columns > MAX_CELLS) {
    throw new MeasurementError('file-too-large', `The file holds ${rows} rows of ${columns} numbers.`, {
      part,
    });
  }
}

/** A column that holds no single numbers (words, arrays, complex numbers) is left out, and said so. */
export function leftOut(part: Part, name: string, what: string): Finding {
  return finding('unread-column', 'warning', `The column ${showCell(name)} holds ${what} and was left out.`, {
    part,
  });
}

/** Cells that aren't finite become NaN, each with its row and column. */
export function findNotFinite(table: NumberTable, part: Part, withoutValues: boolean): Finding[] {
  return table.data.flatMap((column, j) => {
    const list = new FindingList();
    for (let row = 0; row < table.rows; row += 1) {
      const value = column[row];
      if (Number.isFinite(value)) continue;
      column[row] = NaN;
      const name = table.columns[j].name === '' ? `column ${j + 1}` : table.columns[j].name;
      const shown = withoutValues ? '' : `: ${String(value)}`;
      list.add(() =>
        finding(
          'not-finite',
          'error',
          `The value of ${showCell(name)} in row ${row + 1} is not finite${shown}.`,
          {
            part,
            line: row + 1,
            column: j + 1,
          },
        ),
      );
    }
    return list.toFindings();
  });
}
