'use client';

import { useMemo } from 'react';
import type { FigureNumbers } from '@/lib/figures/csv';
import { formatCount, minus } from '@/lib/figures/format';

/** Rows and columns that are shown at most: more would hold the page up, and nobody reads them. */
const most = { rows: 100, columns: 20 } as const;

/** What isn't shown, in words; empty where everything is. */
function leftOut({ columns, rows }: FigureNumbers): string {
  const parts = [
    ...(rows.length > most.rows ? [`${most.rows} of ${formatCount(rows.length)} rows`] : []),
    ...(columns.length > most.columns ? [`${most.columns} of ${formatCount(columns.length)} columns`] : []),
  ];
  return parts.length ? `The first ${parts.join(' and ')}; “Numbers (CSV)” holds all of them.` : '';
}

function shown(value: number | string | null): string {
  if (value === null) return '–';
  if (typeof value === 'string') return value;
  return Number.isFinite(value) ? String(Number(value.toPrecision(6))).replace('-', minus) : '–';
}

/** The numbers of a figure as a table that scrolls within ten rows or so: as many as can be read, and where the rest is. */
export function NumbersTable({ numbers: make, label }: { numbers: () => FigureNumbers; label: string }) {
  const numbers = useMemo(() => make(), [make]);
  const rest = leftOut(numbers);
  return (
    <>
      {rest ? <p className="mt-2 mb-0 text-note text-ink-2">{rest}</p> : null}
      <div
        role="region"
        aria-label={`Numbers: ${label}`}
        tabIndex={0}
        className="mt-2 max-h-[294px] overflow-auto border-y border-ink"
      >
        <table className="w-full border-separate border-spacing-0 text-small">
          <thead>
            <tr>
              {numbers.columns.slice(0, most.columns).map((column) => (
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
            {numbers.rows.slice(0, most.rows).map((row, i) => (
              <tr key={i}>
                {row.slice(0, most.columns).map((value, j) => (
                  <td key={j} className="py-[3px] pl-2 text-right font-numbers text-number whitespace-nowrap">
                    {shown(value)}
                  </td>
                ))}
              </tr>
            ))}
          </tbody>
        </table>
      </div>
    </>
  );
}
