import type { Finding, ParsedTable } from '@/lib/measurements';

/** Said of a file that can't be laid over a figure: what is wrong, where, and what to do. */
export class OverlayError extends Error {
  override readonly name = 'OverlayError';
}

/** "Line 7, column 2: The value of S is not a number: “x”." */
export function placedWords({ line, column, message }: Pick<Finding, 'line' | 'column' | 'message'>): string {
  const place = [line === undefined ? '' : `line ${line}`, column === undefined ? '' : `column ${column}`];
  const said = place.filter(Boolean).join(', ');
  return said ? `${said[0].toUpperCase()}${said.slice(1)}: ${message}` : message;
}

const plainName = (name: string): string =>
  name
    .toLowerCase()
    .replaceAll('κ', 'kappa')
    .replace(/[^a-z0-9]/g, '');

/** Faults of the columns that are used; those of others don't matter. */
function refuseFaults({ findings }: ParsedTable, used: readonly number[]): void {
  const fault = findings.find(
    ({ level, column }) => level === 'error' && (column === undefined || used.includes(column - 1)),
  );
  if (fault) throw new OverlayError(placedWords(fault));
}

/** A curve from elsewhere, ascending in κ. */
export interface OverlayCurve {
  kappa: Float64Array;
  y: Float64Array;
}

/**
 * The curve of a table: its columns kappa and S, or the only two that it has.
 *
 * Throws OverlayError where there are no such columns, where a cell of theirs is no number, or where κ isn't above 0.
 */
export function curveOf(table: ParsedTable): OverlayCurve {
  const names = table.columns.map(({ name }) => plainName(name));
  const named = [names.indexOf('kappa'), names.findIndex((name) => name === 's' || name === 'y')];
  const [k, s] = named.every((at) => at >= 0) ? named : [0, 1];
  if (k === 0 && s === 1 && table.columns.length !== 2 && !named.every((at) => at >= 0))
    throw new OverlayError(
      `The file has ${table.columns.length} columns, none of them named kappa and S. Name them in its first line, or leave two.`,
    );
  refuseFaults(table, [k, s]);
  const wrong = table.data[k].findIndex((kappa) => !(kappa > 0));
  if (wrong >= 0)
    throw new OverlayError(
      `Line ${table.lines[wrong]}, column ${k + 1}: κ is ${table.data[k][wrong]}; a ratio of wavenumbers is above 0.`,
    );
  const order = Array.from(table.data[k].keys()).sort((a, b) => table.data[k][a] - table.data[k][b]);
  return {
    kappa: Float64Array.from(order, (i) => table.data[k][i]),
    y: Float64Array.from(order, (i) => table.data[s][i]),
  };
}

/** Fewest samples that have a density worth drawing. */
const fewest = 100;

/**
 * Columns of a table of samples that have a parameter's name; rows that a column `warmup` marks are left out.
 *
 * @param names wanted, in order
 * @returns one array a name, null where the table has no such column. Throws OverlayError where it has none at all, where
 *   a used cell is no number, or where there are fewer than 100 samples
 */
export function samplesOf(table: ParsedTable, names: readonly string[]): (Float64Array | null)[] {
  const at = names.map((name) => table.columns.findIndex((column) => column.name === name));
  const used = at.filter((i) => i >= 0);
  if (!used.length)
    throw new OverlayError(
      `No column has the name of a parameter shown here (${names.join(', ')}). The file has ${table.columns.map(({ name }) => name).join(', ')}.`,
    );
  refuseFaults(table, used);
  const warmup = table.columns.findIndex(({ name }) => name === 'warmup');
  const kept = Array.from(table.lines.keys()).filter((row) => warmup < 0 || table.data[warmup][row] === 0);
  if (kept.length < fewest)
    throw new OverlayError(`The file has ${kept.length} samples after warm-up; a density needs ${fewest}.`);
  return at.map((i) => (i < 0 ? null : Float64Array.from(kept, (row) => table.data[i][row])));
}
