import { SelectField } from '@/components/ui/field';
import { DataTable } from '@/components/ui/table';
import { formatNumber, noValue } from '@/lib/figures/format';
import type { ColumnMapping, ColumnRole } from '@/lib/measurements';
import type { ColumnView } from './preflight-view';

/** What a column can mean, in the order of the choice. */
export const meanings: readonly { role: ColumnRole; label: string }[] = [
  { role: 'kappaLo', label: 'lower edge in κ' },
  { role: 'kappaHi', label: 'upper edge in κ' },
  { role: 'kappa', label: 'κ = k_long/k_short' },
  { role: 'kLong', label: 'k_long, the soft mode' },
  { role: 'kShort', label: 'k_short' },
  { role: 'k1', label: 'k1, a hard side' },
  { role: 'k2', label: 'k2, a hard side' },
  { role: 'k3', label: 'k3, the soft side' },
  { role: 'S', label: 'shape function S' },
  { role: 'sigma', label: 'standard error of S' },
];

/** A cell's number as a file has it: plain in ordinary sizes, with an exponent else. */
export function cellNumber(value: number): string {
  if (!Number.isFinite(value)) return noValue;
  const size = Math.abs(value);
  if (size !== 0 && (size < 1e-2 || size >= 1e6)) return value.toExponential(3).replace(/-/g, '−');
  if (Number.isInteger(value)) return formatNumber(value, 0);
  return formatNumber(value, size >= 100 ? 1 : 3);
}

/** The mapping after one column's meaning has changed; a meaning belongs to one column at a time. */
export function remapped(
  columns: readonly ColumnView[],
  column: number,
  role: ColumnRole | null,
): ColumnMapping {
  const mapping: ColumnMapping = {};
  columns.forEach((view, j) => {
    const now = j === column ? role : view.role === role ? null : view.role;
    if (now) mapping[now] = j;
  });
  return mapping;
}

export function ColumnsTable({
  columns,
  onMapping,
}: {
  columns: readonly ColumnView[];
  onMapping: (mapping: ColumnMapping) => void;
}) {
  return (
    <DataTable
      ruled
      label="Columns of the file"
      columns={[
        { key: 'name', head: 'In the file' },
        { key: 'meaning', head: 'Meaning' },
        { key: 'first', head: 'first row', numeric: true, phone: 'drop' },
        { key: 'last', head: 'last row', numeric: true, phone: 'drop' },
      ]}
      rows={columns.map((column, j) => ({
        key: String(j),
        cells: {
          name: (
            <span className="font-numbers text-number wrap-anywhere">
              {column.name}
              {column.unit ? ` [${column.unit}]` : ''}
            </span>
          ),
          meaning: (
            <div className="max-w-[264px]">
              <SelectField
                hiddenLabel={`Meaning of ${column.name}`}
                name={`meaning-${j}`}
                value={column.role ?? ''}
                options={[
                  { value: '', label: 'not used' },
                  ...meanings.map(({ role, label }) => ({ value: role, label })),
                ]}
                onChange={(event) =>
                  onMapping(remapped(columns, j, (event.target.value || null) as ColumnRole | null))
                }
              />
            </div>
          ),
          first: cellNumber(column.first),
          last: cellNumber(column.last),
        },
      }))}
    />
  );
}
