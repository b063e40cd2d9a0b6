import type { FigureNumbers } from '@/lib/figures/csv';
import { minus } from '@/lib/figures/format';

function shown(value: number | string | null): string {
  if (value === null) return '–';
  if (typeof value === 'string') return value;
  return Number.isFinite(value) ? String(Number(value.toPrecision(6))).replace('-', minus) : '–';
}

/** The numbers of a figure as a table that scrolls within ten rows or so. */
export function NumbersTable({ numbers, label }: { numbers: FigureNumbers; label: string }) {
  return (
    <div
      role="region"
      aria-label={`Numbers: ${label}`}
      tabIndex={0}
      className="mt-2 max-h-[294px] overflow-auto border-y border-ink"
    >
      <table className="w-full border-separate border-spacing-0 text-small">
        <thead>
          <tr>
            {numbers.columns.map((column) => (
              <th
                key={column}
                scope="col"
                className="sticky top-0 border-b border-rule bg-paper py-[6px] pl-2 text-right font-controls text-note text-ink-2"
              >
                {column}
              </th>
            ))}
          </tr>
        </thead>
        <tbody>
          {numbers.rows.map((row, i) => (
            <tr key={i}>
              {row.map((value, j) => (
                <td key={j} className="py-[3px] pl-2 text-right font-numbers text-number whitespace-nowrap">
                  {shown(value)}
                </td>
              ))}
            </tr>
          ))}
        </tbody>
      </table>
    </div>
  );
}
