/** The numbers behind a figure: what its table and its CSV hold. */
export interface FigureNumbers {
  /** Names with units, such as "kappa" or "time (s)". */
  columns: readonly string[];
  rows: readonly (readonly (number | string | null)[])[];
}

function cell(value: number | string | null): string {
  if (value === null) return '';
  if (typeof value === 'number') return Number.isFinite(value) ? String(value) : '';
  return /[",\n\r]/.test(value) ? `"${value.replace(/"/g, '""')}"` : value;
}

/**
 * Comma-separated text with a head line, numbers in full precision with a plain minus, empty cells for what isn't known.
 *
 * @see RFC 4180 (with line feeds alone)
 */
export function toCsv({ columns, rows }: FigureNumbers): string {
  return [columns, ...rows].map((row) => row.map(cell).join(',')).join('\n') + '\n';
}
